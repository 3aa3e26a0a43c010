import { eq, sql } from 'drizzle-orm'
import { hexBytes } from '#shared/bytes/hex.ts'
import type { Stamped } from '#server/adapters/timestamp/timestamper.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { type SealingRow, sealingEnds, waitingSealing } from '#server/store/queries/sealings.ts'
import { sealInForce, type SealRow, sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { person } from '#server/store/schema/people.ts'
import { seal, timestamping } from '#server/store/schema/seal.ts'
import { discardWaitingSeal } from './discard-sealing.ts'
import { lockDraw, type LockedDraw, loggedNames } from './lock-draw.ts'
import { retire } from './put-seal.ts'

/** The writes of a seal that begins to count, in their order: after each of them a worker may die. */
export const SEALING_POINTS = [
  'timestamp-given',
  'seal-counts',
  'state-sealed',
  'seal-logged',
  'seal-jobs-enqueued',
  'sealing-committed',
] as const
export type SealingPoint = (typeof SEALING_POINTS)[number]

export type Completion =
  /** No seal of this draw waits for anything. */
  | { readonly kind: 'none' }
  | { readonly kind: 'counts' }
  /** No authority gave a timestamp yet. */
  | { readonly kind: 'waiting'; readonly tries: number }
  /** It could not count any more. */
  | { readonly kind: 'discarded'; readonly reason: string }

export interface CompletionInput {
  readonly draw: string
  /** How long an authority may take, in milliseconds; without it as long as usual. */
  readonly withinMs?: number
  /** Called after each write: for tests that want the worker dead there. */
  readonly afterWrite?: (point: SealingPoint) => void
}

/** Somebody waits in the office for so long, in milliseconds; then the worker goes on. */
export const AT_ONCE_MS = 4000

/**
 * Asks an authority for the timestamp of a seal that waits for one, outside of any transaction; then, in one transaction,
 * lets the seal count: its timestamp, the draw's state, the log and the jobs that follow. Where the time for it has gone
 * by, the seal is discarded and the office told. Safe to run at any time, any number of times, in several processes at once.
 */
export async function completeSealing(services: Services, input: CompletionInput): Promise<Completion> {
  const afterWrite = input.afterWrite ?? (() => undefined)
  const waiting = await waitingSealing(services.db, input.draw)
  if (!waiting) return { kind: 'none' }
  const late = tooLate(services, waiting, sealInForce(await sealsOf(services.db, input.draw)))
  if (late !== null) return discard(services, waiting, late)
  const answer = await services.timestamps.stamp(hexBytes(waiting.digest, 32), input.withinMs)
  if (answer.kind === 'none') {
    const detail = answer.reasons.map((reason) => `${reason.url}: ${reason.detail}`).join(' ')
    return { kind: 'waiting', tries: await note(services, waiting, detail) }
  }
  if (answer.stamp.latest >= waiting.drawAt) return discard(services, waiting, LATE)
  afterWrite('timestamp-given')
  try {
    const counts = await inTransaction(services, async (tx) => {
      const locked = await lockDraw(tx, input)
      const current = await waitingSealing(tx.db, input.draw)
      // Somebody else was faster, or it was discarded.
      if (current?.id !== waiting.id) return false
      if (locked.row.version !== waiting.drawVersion) {
        throw new CommandError('changed', 'The draw was changed while its seal waited for a timestamp. Seal it again.')
      }
      await letCount(tx, services, locked, waiting, answer.stamp, afterWrite)
      return true
    })
    if (!counts) return { kind: 'none' }
    afterWrite('sealing-committed')
    return { kind: 'counts' }
  } catch (error) {
    if (error instanceof CommandError) return discard(services, waiting, error.message)
    throw error
  }
}

const LATE =
  'No timestamp authority gave a timestamp in time before the draw. Postpone the draw, and seal it when one answers again.'

/** Why a seal can count no more; null while it can. */
function tooLate(services: Services, waiting: SealingRow, inForce: SealRow | null): string | null {
  const now = services.clock.now()
  if (inForce?.beaconRoundAt && now >= inForce.beaconRoundAt) {
    return 'No timestamp authority gave a timestamp before the time of the seal that was to be replaced: that one stands.'
  }
  return now > sealingEnds(waiting.drawAt) ? LATE : null
}

async function discard(services: Services, waiting: SealingRow, reason: string): Promise<Completion> {
  return inTransaction(services, async (tx): Promise<Completion> => {
    const { row } = await lockDraw(tx, { draw: waiting.drawId })
    if ((await waitingSealing(tx.db, row.id))?.id !== waiting.id) return { kind: 'none' }
    await discardWaitingSeal(tx, services, null, row, reason)
    return { kind: 'discarded', reason }
  })
}

async function note(services: Services, waiting: SealingRow, detail: string): Promise<number> {
  const now = services.clock.now()
  // The sealing may be discarded in this very moment.
  const { rows } = await services.db.execute<{ tries: number }>(sql`
    insert into timestamping (sealing_id, tries, tried_at, detail)
    select id, 1, ${now}, ${detail.slice(0, 1000)} from sealing where id = ${waiting.id}
    on conflict (sealing_id) do update set tries = ${timestamping.tries} + 1, tried_at = excluded.tried_at, detail = excluded.detail
    returning tries`)
  return rows[0]?.tries ?? 1
}

async function letCount(
  tx: Transaction,
  services: Services,
  locked: LockedDraw,
  waiting: SealingRow,
  stamp: Stamped,
  afterWrite: (point: SealingPoint) => void,
): Promise<void> {
  const { row } = locked
  const before = waiting.supersedes === null ? null : sealInForce(await sealsOf(tx.db, row.id))
  const { actorId, drawVersion: _version, madeAt: _made, ...made } = waiting
  await tx.db.insert(seal).values({
    ...made,
    timestamp: stamp.response,
    timestampAt: stamp.genTime,
    timestampAuthority: stamp.authority,
  })
  afterWrite('seal-counts')
  await tx.db
    .update(draw)
    .set({ state: 'sealed', sealedAt: waiting.sealedAt, drawAt: waiting.drawAt, version: row.version + 1 })
    .where(eq(draw.id, row.id))
  if (before) await retire(tx, services, [before.id])
  afterWrite('state-sealed')
  await tell(tx, services, locked, waiting, actorId)
  afterWrite('seal-logged')
  await services.queue.enqueue(
    tx.client,
    'settle',
    { draw: row.id },
    waiting.beaconRoundAt === null ? {} : { startAfter: waiting.beaconRoundAt },
  )
  await services.queue.enqueue(tx.client, 'prepare-mail', { draw: row.id, about: 'seal' })
  afterWrite('seal-jobs-enqueued')
}

/** Audit and log, in the name of the person who sealed. */
async function tell(
  tx: Transaction,
  services: Services,
  locked: LockedDraw,
  waiting: SealingRow,
  actorId: string | null,
): Promise<void> {
  const { row } = locked
  const { digest, supersedes, reason, drawAt } = waiting
  const [actor] = actorId
    ? await tx.db.select({ id: person.id, name: person.name }).from(person).where(eq(person.id, actorId))
    : []
  const about = { organisationId: row.organisationId, drawId: row.id, subjectId: digest }
  if (supersedes === null || reason === null) {
    await audit(tx, services, actor ?? null, {
      action: 'draw.seal',
      ...about,
      sentence: `Sealed the list: ${row.entrantCount} entrants, ${row.ticketCount} tickets.`,
      after: { digest, entrants: row.entrantCount, tickets: row.ticketCount, drawAt },
    })
    await appendLog(tx, services, { event: 'sealed', ...loggedNames(locked), digest })
    return
  }
  await audit(tx, services, actor ?? null, {
    action: 'draw.postpone',
    ...about,
    sentence: `Postponed the draw: ${reason}`,
    before: { closesAt: row.closesAt, drawAt: row.drawAt },
    after: { closesAt: row.closesAt, drawAt },
  })
  await appendLog(tx, services, { event: 'postponed', ...loggedNames(locked), note: reason })
  // The new seal's mail tells of both, so no notice goes out besides.
  await appendLog(tx, services, { event: 'replaced', ...loggedNames(locked), digest, supersedes })
}
