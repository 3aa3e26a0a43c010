import type { RouteObject } from 'react-router'

/** /office/…: paths and lazy imports only, so that this module stays light. */
export const officeRoutes: RouteObject[] = []
