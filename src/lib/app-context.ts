import type { QueryClient } from '@tanstack/react-query'
import { createContext as createReactContext, use } from 'react'
import { createContext as createRouterContext } from 'react-router'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** What loaders read through: passed in on the server, over fetch in the browser. */
export interface LoadContext {
  readonly api: ApiClient
  readonly queryClient: QueryClient
}
export const loadContext = createRouterContext<LoadContext>()

/** What components read through. */
export interface AppContext {
  readonly api: ApiClient
  /** Scheme, host and port of the site, for canonical addresses. */
  readonly origin: string
}
export const AppContextReact = createReactContext<AppContext | null>(null)

export function useApp(): AppContext {
  const app = use(AppContextReact)
  if (!app) throw new Error('No application context: render inside AppContextReact.')
  return app
}
