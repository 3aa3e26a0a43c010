import type { RouteObject } from 'react-router'

/** /office/…: paths and lazy imports only, so that this module stays light. */
export const officeRoutes: RouteObject[] = [
  { path: 'office', lazy: () => import('./index-page.tsx') },
  {
    path: 'office/:organisation',
    lazy: () => import('./layout.tsx'),
    children: [
      { index: true, lazy: () => import('./draws-page.tsx') },
      { path: 'people', lazy: () => import('./people/people-page.tsx') },
      { path: 'draws/new', lazy: () => import('./draw/new-draw-page.tsx') },
      {
        path: 'draws/:draw',
        lazy: () => import('./draw/draw-layout.tsx'),
        children: [
          { index: true, lazy: () => import('./draw/overview-page.tsx') },
          { path: 'terms', lazy: () => import('./draw/terms-page.tsx') },
          { path: 'prizes', lazy: () => import('./draw/prizes-page.tsx') },
          { path: 'entrants', lazy: () => import('./entrants/entrants-page.tsx') },
          { path: 'import', lazy: () => import('./import/upload-page.tsx') },
          { path: 'import/:import', lazy: () => import('./import/import-page.tsx') },
          { path: 'seal', lazy: () => import('./draw/seal-page.tsx') },
          { path: 'slips', lazy: () => import('./paper/slips-page.tsx') },
          { path: 'poster', lazy: () => import('./paper/poster-page.tsx') },
          { path: 'history', lazy: () => import('./draw/history-page.tsx') },
        ],
      },
    ],
  },
]
