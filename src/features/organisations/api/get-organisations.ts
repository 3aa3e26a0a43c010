import { queryOptions } from '@tanstack/react-query'
import { getOrganisation, listOrganisations } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** A search out of an address; what the address has wrong falls back to everything, page 1. */
export function organisationSearch(params: URLSearchParams): { readonly q: string; readonly page: number } {
  const { shape } = listOrganisations.query
  const q = shape.q.safeParse(params.get('q') ?? undefined)
  const page = shape.page.safeParse(params.get('page') ?? undefined)
  return { q: q.data?.trim() ?? '', page: page.data ?? 1 }
}

export const organisationsQuery = (api: ApiClient, query: { readonly q: string; readonly page: number }) =>
  queryOptions({ queryKey: ['organisations', query], queryFn: () => api.call(listOrganisations, { query }) })

export const organisationQuery = (api: ApiClient, slug: string) =>
  queryOptions({
    queryKey: ['organisation', slug],
    queryFn: () => api.call(getOrganisation, { params: { slug } }),
  })
