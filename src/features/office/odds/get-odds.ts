import { keepPreviousData, queryOptions } from '@tanstack/react-query'
import { getOfficeOdds } from '#shared/schemas/api/odds.ts'
import type { ApiClient, CallInput } from '#shared/schemas/endpoint.ts'

export type OddsAsked = NonNullable<CallInput<typeof getOfficeOdds>['query']>

export const officeOddsQuery = (api: ApiClient, draw: string, query: OddsAsked) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'odds', query],
    queryFn: () => api.call(getOfficeOdds, { params: { draw }, query }),
    placeholderData: keepPreviousData,
    refetchInterval: (current) => (current.state.data?.state === 'working' ? 5_000 : false),
  })
