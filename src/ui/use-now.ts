import { useState, useSyncExternalStore } from 'react'

function everySecond(tick: () => void): () => void {
  const timer = setInterval(tick, 1000)
  return () => clearInterval(timer)
}

/**
 * The server's time in whole seconds since 1970, ticking once hydrated. The reader's own clock only counts on from
 * what the server said, so that a wrong clock on a phone shows no wrong countdown.
 */
export function useNow(serverNow: string): number {
  const server = Math.floor(Date.parse(serverNow) / 1000)
  const [skew] = useState(() => server - Math.floor(Date.now() / 1000))
  return useSyncExternalStore(
    everySecond,
    () => Math.max(server, Math.floor(Date.now() / 1000) + skew),
    () => server,
  )
}
