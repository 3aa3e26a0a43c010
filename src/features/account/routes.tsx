import type { RouteObject } from 'react-router'

/** /sign-in, /invitations/:token, /password-resets/:token: paths and lazy imports only, so that this module stays light. */
export const accountRoutes: RouteObject[] = []
