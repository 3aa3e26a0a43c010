import { QueryClientProvider } from '@tanstack/react-query'
import { act, render, waitFor, type RenderResult } from '@testing-library/react'
import { createMemoryRouter, RouterContextProvider, RouterProvider, type RouteObject } from 'react-router'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { accountRoutes } from '#src/features/account/routes.tsx'
import { administratorRoutes } from '#src/features/administrator/routes.tsx'
import { officeRoutes } from '#src/features/office/routes.tsx'
import { AppContextReact, loadContext } from '#src/lib/app-context.ts'
import { createQueryClient } from '#src/lib/query-client.ts'

/** Every signed-in page as the product routes it, and a plain page wherever else a test ends up. */
const ROUTES: RouteObject[] = [
  {
    id: 'root',
    HydrateFallback: () => null,
    ErrorBoundary: () => <p>The error page</p>,
    children: [...accountRoutes, ...officeRoutes, ...administratorRoutes, { path: '*', element: <p>Elsewhere</p> }],
  },
]

export interface Opened extends RenderResult {
  readonly router: ReturnType<typeof createMemoryRouter>
}

/** Opens a page of the product in the document of the test, loaders and all, over the given API. */
export async function openPage(path: string, api: ApiClient, routes: RouteObject[] = ROUTES): Promise<Opened> {
  const queryClient = createQueryClient()
  queryClient.setDefaultOptions({ queries: { ...queryClient.getDefaultOptions().queries, retry: false } })
  const router = createMemoryRouter(routes, {
    initialEntries: [path],
    getContext: () => new RouterContextProvider(new Map([[loadContext, { api, queryClient }]])),
  })
  let result: RenderResult | undefined
  await act(async () => {
    result = render(
      <AppContextReact value={{ api, origin: 'https://evenpenny.example' }}>
        <QueryClientProvider client={queryClient}>
          <RouterProvider router={router} />
        </QueryClientProvider>
      </AppContextReact>,
    )
  })
  // Pages are fetched when they are first needed, which takes a while in a fresh test process.
  await waitFor(
    () => {
      const idle = router.state.initialized && router.state.navigation.state === 'idle'
      if (!idle || !result?.container.hasChildNodes()) throw new Error(`${path} still loads`)
    },
    { timeout: 20_000 },
  )
  return { ...(result as RenderResult), router }
}
