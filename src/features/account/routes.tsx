import type { RouteObject } from 'react-router'

/** Signing in and what comes before it: paths and lazy imports only, so that this module stays light. */
export const accountRoutes: RouteObject[] = [
  { path: 'sign-in', lazy: () => import('./sign-in-page.tsx') },
  { path: 'invitations/:token', lazy: () => import('./invitation-page.tsx') },
  { path: 'password-resets', lazy: () => import('./forgotten-page.tsx') },
  { path: 'password-resets/:token', lazy: () => import('./reset-page.tsx') },
  { path: 'account', lazy: () => import('./account-page.tsx') },
]
