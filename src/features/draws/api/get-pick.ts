import { queryOptions } from '@tanstack/react-query'
import { getPick } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

export const pickQuery = (api: ApiClient, slug: string, pick: string) =>
  queryOptions({
    queryKey: ['draw', slug, 'pick', pick],
    queryFn: () => api.call(getPick, { params: { slug, pick } }),
  })
