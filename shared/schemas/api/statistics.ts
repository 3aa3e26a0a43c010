import { z } from 'zod'
import type { Endpoint } from '../endpoint.ts'
import { empty, instant } from '../values.ts'

/** The entry order test over the site's own draws: whether winners stand too early or too late in the lists. */
export const statisticsView = z.object({
  at: instant,
  /** Drawn draws that were looked at: all of them, or the newest where there are very many. */
  draws: z.int(),
  picks: z.int(),
  /** Null while nothing is drawn. `mean` is how far down the list, by tickets, the picks fell on average: 0 to 1. */
  order: z.object({ mean: z.number(), z: z.number(), p: z.number() }).nullable(),
})
export type StatisticsView = z.infer<typeof statisticsView>

export const getStatistics = {
  name: 'getStatistics',
  method: 'GET',
  path: '/api/statistics',
  summary: 'Whether the place in the list mattered, over all draws',
  params: empty,
  query: empty,
  body: empty,
  response: statisticsView,
} as const satisfies Endpoint
