import { queryOptions } from '@tanstack/react-query'
import { getHome } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

export const homeQuery = (api: ApiClient) =>
  queryOptions({ queryKey: ['home'], queryFn: () => api.call(getHome), refetchInterval: 60_000 })
