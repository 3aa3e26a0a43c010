import type { DehydratedState } from '@tanstack/react-query'
import {
  isRouteErrorResponse,
  UNSAFE_ErrorResponseImpl,
  type HydrationState,
  type StaticHandlerContext,
} from 'react-router'
import type { Assets } from './document.tsx'

/** What the server hands to the browser so that it goes on from the same page. */
export interface PageState {
  readonly origin: string
  readonly assets: Assets
  readonly router: {
    readonly loaderData: Record<string, unknown>
    readonly errors: Record<string, RouteFailure> | null
  }
  readonly query: DehydratedState
}

/** An error as the browser may know it: a status and words for people, nothing of the server's insides. */
interface RouteFailure {
  readonly status: number
  readonly statusText: string
  readonly data: unknown
}

/**
 * JSON that is safe inside a script element: no `<` can end it or open a comment. U+2028 and U+2029 are escaped for
 * readers older than ECMAScript 2019.
 */
export function escapeJson(value: unknown): string {
  return JSON.stringify(value)
    .replace(/</g, '\\u003c')
    .replace(/>/g, '\\u003e')
    .replace(/&/g, '\\u0026')
    .replace(/\u2028/g, '\\u2028')
    .replace(/\u2029/g, '\\u2029')
}

export function routerState(context: StaticHandlerContext): PageState['router'] {
  const errors = context.errors
    ? Object.fromEntries(Object.entries(context.errors).map(([route, error]) => [route, failureOf(error)]))
    : null
  return { loaderData: context.loaderData, errors }
}

function failureOf(error: unknown): RouteFailure {
  if (isRouteErrorResponse(error)) {
    return { status: error.status, statusText: error.statusText, data: error.data as unknown }
  }
  return { status: 500, statusText: 'Internal Server Error', data: null }
}

export function hydrationState(router: PageState['router']): HydrationState {
  return {
    loaderData: router.loaderData,
    errors: router.errors
      ? Object.fromEntries(
          Object.entries(router.errors).map(([route, failure]) => [
            route,
            new UNSAFE_ErrorResponseImpl(failure.status, failure.statusText, failure.data, false),
          ]),
        )
      : null,
  }
}
