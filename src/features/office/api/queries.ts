import { queryOptions, useQueryClient } from '@tanstack/react-query'
import { listCorrections } from '#shared/schemas/api/entry.ts'
import {
  getDrawAudit,
  getImport,
  getOfficeDraw,
  getSealSummary,
  listEntrants,
  listImports,
  listOfficeDraws,
  listPeople,
  type ImportView,
  type OfficeDraw,
} from '#shared/schemas/api/office.ts'
import type { ApiClient, CallInput } from '#shared/schemas/endpoint.ts'

export type EntrantSearch = NonNullable<CallInput<typeof listEntrants>['query']>
type AuditSearch = NonNullable<CallInput<typeof getDrawAudit>['query']>

export const officeDrawsQuery = (api: ApiClient, organisation: string) =>
  queryOptions({
    queryKey: ['office', 'draws', organisation],
    queryFn: () => api.call(listOfficeDraws, { params: { organisation } }),
  })

/** Milliseconds between looks at a draw in which jobs are at work, and in one about to be drawn. */
const BUSY = 2_000
const SLOW = 15_000

export const officeDrawQuery = (api: ApiClient, draw: string) =>
  queryOptions({
    queryKey: ['office', 'draw', draw],
    queryFn: () => api.call(getOfficeDraw, { params: { draw } }),
    refetchInterval: (query) => (query.state.data ? drawInterval(query.state.data) : false),
  })

/** How often the office asks again: often while a job runs or a result is due, seldom otherwise. */
export function drawInterval(draw: OfficeDraw): number | false {
  const now = Date.parse(draw.now)
  if (draw.sealing) return BUSY
  // A job whose time has come begins within a second or two.
  if (draw.jobs.some(({ state, at }) => state === 'running' || (state === 'waiting' && Date.parse(at) <= now)))
    return BUSY
  if (draw.state === 'sealed' && Date.parse(draw.drawAt) - now < 60_000) return BUSY
  if (draw.jobs.some((job) => job.state === 'waiting')) return SLOW
  if (draw.mail.entry.queued + draw.mail.seal.queued + draw.mail.result.queued + draw.mail.notice.queued > 0)
    return BUSY
  return draw.state === 'drawn' || draw.state === 'cancelled' || draw.state === 'failed' ? false : SLOW
}

export const entrantsQuery = (api: ApiClient, draw: string, query: EntrantSearch) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'entrants', query],
    queryFn: () => api.call(listEntrants, { params: { draw }, query }),
  })

export const importsQuery = (api: ApiClient, draw: string) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'imports'],
    queryFn: () => api.call(listImports, { params: { draw } }),
  })

export const importQuery = (api: ApiClient, draw: string, id: string) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'imports', id],
    queryFn: () => api.call(getImport, { params: { draw, import: id } }),
    refetchInterval: (query) => (isAtWork(query.state.data) ? 700 : false),
  })

/** Whether the server is still reading or storing a file. */
export function isAtWork(view: Pick<ImportView, 'state'> | undefined): boolean {
  return view?.state === 'reading' || view?.state === 'applying'
}

export const correctionsQuery = (api: ApiClient, draw: string, page: number) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'corrections', page],
    queryFn: () => api.call(listCorrections, { params: { draw }, query: { page } }),
  })

export const sealSummaryQuery = (api: ApiClient, draw: string) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'seal'],
    queryFn: () => api.call(getSealSummary, { params: { draw } }),
    staleTime: 0,
  })

export const auditQuery = (api: ApiClient, draw: string, query: AuditSearch) =>
  queryOptions({
    queryKey: ['office', 'draw', draw, 'audit', query],
    queryFn: () => api.call(getDrawAudit, { params: { draw }, query }),
  })

export const peopleQuery = (api: ApiClient, organisation: string) =>
  queryOptions({
    queryKey: ['office', 'people', organisation],
    queryFn: () => api.call(listPeople, { params: { organisation } }),
  })

/** For what answers with the draw itself: keeps it, and forgets what was read of it before. */
export function useKeepDraw() {
  const queryClient = useQueryClient()
  return async (draw: OfficeDraw) => {
    await Promise.all([
      queryClient.invalidateQueries({ queryKey: ['office', 'draw', draw.id] }),
      queryClient.invalidateQueries({ queryKey: ['office', 'draws'] }),
      queryClient.invalidateQueries({ queryKey: ['draw', draw.slug] }),
    ])
    queryClient.setQueryData(['office', 'draw', draw.id], draw)
  }
}
