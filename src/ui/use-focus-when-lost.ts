import { useEffect, useRef } from 'react'

/**
 * When `key` changes and what had the focus has gone with it, the focus goes to the page's matter: the next press of a
 * key then starts there, not at the very top, and a screen reader is not left in silence.
 */
export function useFocusWhenLost(key: string): void {
  const before = useRef(key)
  useEffect(() => {
    if (before.current === key) return
    before.current = key
    if (document.activeElement === null || document.activeElement === document.body) {
      document.getElementById('main')?.focus({ preventScroll: true })
    }
  }, [key])
}
