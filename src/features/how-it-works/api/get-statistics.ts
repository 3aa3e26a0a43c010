import { queryOptions } from '@tanstack/react-query'
import { getStatistics } from '#shared/schemas/api/statistics.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

export const statisticsQuery = (api: ApiClient) =>
  queryOptions({ queryKey: ['statistics'], queryFn: () => api.call(getStatistics), staleTime: 300_000 })
