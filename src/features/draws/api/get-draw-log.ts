import { queryOptions } from '@tanstack/react-query'
import { type DrawLog, getDrawLog } from '#shared/schemas/api/log.ts'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

/** The log's proofs of a draw, asked for anew whenever its history has grown. */
export const drawLogQuery = (api: ApiClient, draw: Pick<DrawPage, 'slug' | 'history'>) =>
  queryOptions({
    queryKey: ['draw-log', draw.slug, draw.history.at(-1)?.index ?? -1],
    queryFn: (): Promise<DrawLog> => api.call(getDrawLog, { params: { slug: draw.slug } }),
    staleTime: Number.POSITIVE_INFINITY,
  })
