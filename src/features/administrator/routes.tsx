import type { RouteObject } from 'react-router'

/** /admin/…: paths and lazy imports only, so that this module stays light. */
export const administratorRoutes: RouteObject[] = []
