import { queryOptions } from '@tanstack/react-query'
import { getLog } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** The page number of an address; 1 where it has none or a wrong one. */
export function logPageFrom(params: URLSearchParams): number {
  return getLog.query.shape.page.safeParse(params.get('page') ?? undefined).data ?? 1
}

export const logQuery = (api: ApiClient, page: number) =>
  queryOptions({ queryKey: ['log', page], queryFn: () => api.call(getLog, { query: { page } }) })
