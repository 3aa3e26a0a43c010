import { queryOptions } from '@tanstack/react-query'
import { searchDraws } from '#shared/schemas/api/public.ts'
import type { ApiClient, CallInput } from '#shared/schemas/endpoint.ts'

export type DrawSearch = NonNullable<CallInput<typeof searchDraws>['query']>

/** A search out of an address; what the address has wrong falls back to everything, page 1. */
export function searchFrom(
  params: URLSearchParams,
): Required<Pick<DrawSearch, 'q' | 'state'>> & { readonly page: number } {
  const given = (name: string) => params.get(name) ?? undefined
  const { shape } = searchDraws.query
  const q = shape.q.safeParse(given('q'))
  const state = shape.state.safeParse(given('state'))
  const page = shape.page.safeParse(given('page'))
  return { q: q.data?.trim() ?? '', state: state.data ?? 'all', page: page.data ?? 1 }
}

export const searchQuery = (api: ApiClient, query: DrawSearch) =>
  queryOptions({
    queryKey: ['draws', query],
    queryFn: () => api.call(searchDraws, { query }),
  })
