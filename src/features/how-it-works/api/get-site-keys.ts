import { queryOptions } from '@tanstack/react-query'
import { getSiteKeys } from '#shared/schemas/api/site-keys.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

export const siteKeysQuery = (api: ApiClient) =>
  queryOptions({ queryKey: ['site-keys'], queryFn: () => api.call(getSiteKeys), staleTime: 300_000 })
