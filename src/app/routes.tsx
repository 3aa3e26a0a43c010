import { Outlet, type RouteObject } from 'react-router'
import { accountRoutes } from '#src/features/account/routes.tsx'
import { administratorRoutes } from '#src/features/administrator/routes.tsx'
import { officeRoutes } from '#src/features/office/routes.tsx'
import { ErrorPage } from './error-page.tsx'
import { PublicLayout } from './public-page.tsx'

/** An address that is no page's: the error page says so. */
function nowhere(): never {
  throw new Response(null, { status: 404 })
}

/**
 * Every page of the site. Pages are fetched when they are first needed, so that a reader of a result gets none of the
 * office; each page module exports `Component` and, where it reads anything, `loader`.
 */
export const routes: RouteObject[] = [
  {
    id: 'root',
    Component: Outlet,
    ErrorBoundary: ErrorPage,
    children: [
      {
        Component: PublicLayout,
        children: [
          { index: true, lazy: () => import('#src/features/home/page.tsx') },
          { path: 'draws', lazy: () => import('#src/features/draws/search-page.tsx') },
          { path: 'draws/:slug', lazy: () => import('#src/features/draws/draw-page.tsx') },
          { path: 'draws/:slug/picks/:pick', lazy: () => import('#src/features/draws/pick-page.tsx') },
          { path: 'draws/:slug/check', lazy: () => import('#src/features/draws/check-page.tsx') },
          { path: 'draws/:slug/hall', lazy: () => import('#src/features/draws/hall-page.tsx') },
          { path: 'entry', lazy: () => import('#src/features/entry/find-page.tsx') },
          { path: 'entry/:token', lazy: () => import('#src/features/entry/entry-page.tsx') },
          { path: 'organisations', lazy: () => import('#src/features/organisations/list-page.tsx') },
          { path: 'organisations/:slug', lazy: () => import('#src/features/organisations/organisation-page.tsx') },
          { path: 'how-it-works', lazy: () => import('#src/features/how-it-works/page.tsx') },
          { path: 'developers', lazy: () => import('#src/features/developers/page.tsx') },
          { path: 'log', lazy: () => import('#src/features/log/page.tsx') },
        ],
      },
      ...accountRoutes,
      ...officeRoutes,
      ...administratorRoutes,
      { path: '*', loader: nowhere, Component: Outlet },
    ],
  },
]
