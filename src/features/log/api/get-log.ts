import { queryOptions } from '@tanstack/react-query'
import { getLogState } from '#shared/schemas/api/log.ts'
import { getLog } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** Which part of the log an address asks for: a page, or the one on which an entry stands. */
export interface LogPlace {
  readonly page: number
  readonly at?: number
}

/** The place that an address names; the first page where it names none or a wrong one. */
export function logPlaceFrom(params: URLSearchParams): LogPlace {
  const shape = getLog.query.shape
  const page = shape.page.safeParse(params.get('page') ?? undefined).data ?? 1
  const asked = params.get('at')?.trim()
  const at = asked ? shape.at.safeParse(asked).data : undefined
  return at === undefined ? { page } : { page, at }
}

export const logQuery = (api: ApiClient, place: LogPlace) =>
  queryOptions({ queryKey: ['log', place], queryFn: () => api.call(getLog, { query: place }) })

export const logStateQuery = (api: ApiClient) =>
  queryOptions({ queryKey: ['log-state'], queryFn: () => api.call(getLogState) })
