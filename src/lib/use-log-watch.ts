import { useEffect, useState } from 'react'
import { useApp } from './app-context.ts'
import type { LogWatch, Watched } from './log-watch.ts'

/**
 * What this browser finds out about the log, once it has; null before, and where there is no JavaScript. The mathematics
 * is loaded only then: a page is read without it.
 */
export function useLogWatch(watched: Watched | undefined): LogWatch | null {
  const { api } = useApp()
  const [found, setFound] = useState<LogWatch | null>(null)
  useEffect(() => {
    if (!watched) return
    let current = true
    const memory = localStore()
    void import('./log-watch.ts')
      .then(({ watchLog }) => watchLog(api, watched, memory))
      .catch((): LogWatch => ({ kind: 'unknown', words: 'This browser could not check the log.' }))
      .then((watch) => {
        if (current) setFound(watch)
      })
    return () => {
      current = false
    }
  }, [api, watched])
  return found
}

/** Null where the browser forbids it. */
function localStore(): Storage | null {
  try {
    return window.localStorage
  } catch {
    return null
  }
}
