import { queryOptions } from '@tanstack/react-query'
import { getEntry, getEntryPicks, getEntryWalk, type EntryView } from '#shared/schemas/api/entry.ts'
import { getDrawOdds } from '#shared/schemas/api/odds.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** Milliseconds between looks at a sealed draw, so that the page tells by itself that it was drawn. */
const AROUND_THE_DRAW = 5_000
const CALM = 60_000

export const entryQuery = (api: ApiClient, token: string) =>
  queryOptions({
    queryKey: ['entry', token],
    queryFn: () => api.call(getEntry, { params: { token } }),
    refetchInterval: (query) => (query.state.data ? entryInterval(query.state.data) : false),
  })

function entryInterval({ draw, result }: EntryView): number | false {
  if (draw.state !== 'sealed' || result) return false
  return Date.parse(draw.drawAt) - Date.parse(draw.now) < CALM ? AROUND_THE_DRAW : CALM
}

export const entryPicksQuery = (api: ApiClient, token: string, page: number) =>
  queryOptions({
    queryKey: ['entry', token, 'picks', page],
    queryFn: () => api.call(getEntryPicks, { params: { token }, query: { page } }),
    staleTime: Number.POSITIVE_INFINITY,
  })

export const entryWalkQuery = (api: ApiClient, token: string, pick: number) =>
  queryOptions({
    queryKey: ['entry', token, 'walk', pick],
    queryFn: () => api.call(getEntryWalk, { params: { token, pick } }),
    staleTime: Number.POSITIVE_INFINITY,
  })

/** What these tickets gave in the sealed list. */
export const entryOddsQuery = (api: ApiClient, entry: EntryView) =>
  queryOptions({
    queryKey: ['entry', 'odds', entry.sealed?.digest ?? null, entry.tickets],
    queryFn: () => api.call(getDrawOdds, { params: { slug: entry.draw.slug }, query: { tickets: entry.tickets } }),
    staleTime: Number.POSITIVE_INFINITY,
    refetchInterval: (query) => (query.state.data?.state === 'working' ? AROUND_THE_DRAW : false),
  })
