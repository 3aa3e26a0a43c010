import { queryOptions } from '@tanstack/react-query'
import { getDraw, type DrawPage } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

const MINUTE = 60_000

export const drawQuery = (api: ApiClient, slug: string) =>
  queryOptions({
    queryKey: ['draw', slug],
    queryFn: () => api.call(getDraw, { params: { slug } }),
    refetchInterval: (query) => (query.state.data ? pollingInterval(query.state.data) : false),
  })

/**
 * Milliseconds until a draw's page asks again: often around the draw, seldom before it, never once nothing can change
 * that somebody waits for. Reckoned from the server's time, which came with the data.
 */
export function pollingInterval(draw: DrawPage): number | false {
  switch (draw.state) {
    case 'draft':
    case 'open':
    case 'closed':
      return MINUTE
    case 'sealed': {
      const left = Date.parse(draw.drawAt) - Date.parse(draw.now)
      if (left <= 0) return 2_000
      return Math.min(MINUTE, left + 1_000)
    }
    case 'drawn':
      // The archive follows the result by moments.
      return draw.result?.archive ? false : 5_000
    case 'concluded':
    case 'cancelled':
    case 'failed':
      return false
  }
}
