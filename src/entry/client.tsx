import '#src/app/app.css'
import { hydrate } from '@tanstack/react-query'
import { startTransition } from 'react'
import { hydrateRoot } from 'react-dom/client'
import { createBrowserRouter, matchRoutes, RouterContextProvider, RouterProvider } from 'react-router'
import { Document, STATE_ID } from '#src/app/document.tsx'
import { Providers } from '#src/app/providers.tsx'
import { routes } from '#src/app/routes.tsx'
import { hydrationState, type PageState } from '#src/app/state.ts'
import { browserApiClient } from '#src/lib/api-client.ts'
import { loadContext } from '#src/lib/app-context.ts'
import { createQueryClient } from '#src/lib/query-client.ts'

/** Lazy pages are fetched before hydration: React must find the very page that the server rendered. */
async function resolveLazyRoutes() {
  const matches = matchRoutes(routes, window.location) ?? []
  await Promise.all(
    matches.map(async ({ route }) => {
      if (typeof route.lazy !== 'function') return
      Object.assign(route, await route.lazy(), { lazy: undefined })
    }),
  )
}

async function start() {
  const text = document.getElementById(STATE_ID)?.textContent ?? ''
  const state = JSON.parse(text) as PageState
  const api = browserApiClient()
  const queryClient = createQueryClient()
  hydrate(queryClient, state.query)
  await resolveLazyRoutes()
  const router = createBrowserRouter(routes, {
    hydrationData: hydrationState(state.router),
    getContext: () => new RouterContextProvider(new Map([[loadContext, { api, queryClient }]])),
  })
  startTransition(() => {
    hydrateRoot(
      document,
      <Document assets={state.assets} state={text}>
        <Providers app={{ api, origin: state.origin }} queryClient={queryClient}>
          <RouterProvider router={router} />
        </Providers>
      </Document>,
    )
  })
}

void start()
