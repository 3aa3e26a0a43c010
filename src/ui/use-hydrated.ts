import { useSyncExternalStore } from 'react'

const never = () => () => {}

/** False on the server and in the first browser render, then true: for controls that do nothing without JavaScript. */
export function useHydrated(): boolean {
  return useSyncExternalStore(
    never,
    () => true,
    () => false,
  )
}
