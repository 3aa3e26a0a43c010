import type { RouteObject } from 'react-router'

/** /admin/…: paths and lazy imports only, so that this module stays light. */
export const administratorRoutes: RouteObject[] = [
  {
    path: 'admin',
    lazy: () => import('./layout.tsx'),
    children: [
      { index: true, lazy: () => import('./state-page.tsx') },
      { path: 'organisations', lazy: () => import('./organisations-page.tsx') },
      { path: 'organisations/new', lazy: () => import('./new-organisation-page.tsx') },
      { path: 'organisations/:organisation', lazy: () => import('./organisation-page.tsx') },
      { path: 'audit', lazy: () => import('./audit-page.tsx') },
    ],
  },
]
