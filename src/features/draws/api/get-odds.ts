import { keepPreviousData, queryOptions } from '@tanstack/react-query'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import { getDrawOdds } from '#shared/schemas/api/odds.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** Whether a draw's page has odds to show: once it is sealed, and before the closing as the list stands. */
export const hasOdds = (draw: Pick<DrawPage, 'state' | 'seal'>) => draw.seal !== null || draw.state === 'open'

/** A draw's odds, also for a number of tickets that was asked about. A sealed list never changes; a new seal is new. */
export const oddsQuery = (api: ApiClient, draw: Pick<DrawPage, 'slug' | 'seal'>, tickets: number | null) =>
  queryOptions({
    queryKey: ['draw', draw.slug, 'odds', draw.seal?.digest ?? null, tickets],
    queryFn: () => api.call(getDrawOdds, { params: { slug: draw.slug }, query: tickets === null ? {} : { tickets } }),
    placeholderData: keepPreviousData,
    staleTime: draw.seal ? Number.POSITIVE_INFINITY : 60_000,
    refetchInterval: (query) => (query.state.data?.state === 'working' ? 5_000 : false),
  })
