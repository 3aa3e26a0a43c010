import type { OfficeDraw } from '#shared/schemas/api/office.ts'

/** Whether the worker is about to make a seal of this draw's list, the first one or one that replaces it. */
export const isBeingMade = (draw: Pick<OfficeDraw, 'jobs'>): boolean =>
  draw.jobs.some(({ kind, state }) => kind === 'seal' && (state === 'running' || state === 'waiting'))

/** Whether a seal is under way: the worker makes it, or it is made and waits for its timestamp. */
export const isBeingSealed = (draw: Pick<OfficeDraw, 'jobs' | 'sealing'>): boolean =>
  draw.sealing !== null || isBeingMade(draw)
