import { eq } from 'drizzle-orm'
import { MIN_SEAL_LEAD } from '#shared/protocol/limits.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid, refused } from '#server/commands/command-error.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { sealingSeconds } from '#server/store/draw-problems.ts'
import { waitingSealing } from '#server/store/queries/sealings.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { person } from '#server/store/schema/people.ts'
import { instantOf } from '#server/time/instants.ts'
import { AT_ONCE_MS, completeSealing } from './complete-sealing.ts'
import { discardWaitingSeal } from './discard-sealing.ts'
import { readLocalTime, readReason } from './draw-values.ts'
import { lockDraw, type LockedDraw, loggedNames, requireState } from './lock-draw.ts'
import { putSeal } from './put-seal.ts'
import { refuseWhileSealing, SEAL_AT_ONCE } from './sealing-job.ts'

export interface PostponeInput {
  readonly draw: string
  readonly version: number
  readonly reason: string
  /** Wall-clock times in the draw's time zone. */
  readonly closesAt?: string | undefined
  readonly drawAt: string
}

/**
 * Before the seal: changes the dates. After it: a new seal, with a new seed, blinding key and references, replaces the one
 * in force as soon as it has its timestamp; that one's seed is then destroyed unopened. Refused from the beacon's round on.
 */
export async function postponeDraw(services: Services, actor: CommandActor, input: PostponeInput): Promise<void> {
  const replaced = await inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    const { row } = locked
    requireState(row, ['open', 'closed', 'sealed'], 'postpone it')
    await refuseWhileSealing(tx, row.id)
    const reason = readReason(input.reason)
    const drawAt = readLocalTime('drawAt', input.drawAt, row.timeZone)
    if (drawAt <= row.drawAt) throw invalid('drawAt', 'Postponing moves the draw to a later time. Choose one.')
    const lead = MIN_SEAL_LEAD + sealingSeconds(row.entrantCount)
    if ((drawAt.getTime() - services.clock.now().getTime()) / 1000 < lead) {
      throw invalid('drawAt', `The draw must lie at least ${lead} seconds ahead. Choose a later time.`)
    }
    await discardWaitingSeal(tx, services, actor, row, 'the draw is postponed.')
    if (row.state === 'sealed') {
      if (input.closesAt !== undefined) {
        throw invalid('closesAt', 'The list is sealed: only the draw time can move. Leave the closing time out.')
      }
      if (row.entrantCount > SEAL_AT_ONCE && actor) {
        await services.queue.enqueue(tx.client, 'seal', {
          draw: row.id,
          actor: actor.id,
          version: row.version,
          entrants: row.entrantCount,
          tickets: row.ticketCount,
          postpone: { drawAt: instantOf(drawAt), reason },
        })
        return false
      }
      await replaceSeal(tx, services, actor, locked, drawAt, reason)
      return true
    }
    await moveDates(tx, services, actor, locked, drawAt, reason, input.closesAt)
    return false
  })
  if (replaced) await completeSealing(services, { draw: input.draw, withinMs: AT_ONCE_MS })
}

/** The worker's part of a long replacement. */
export async function postponeLongList(
  services: Services,
  input: {
    readonly draw: string
    readonly version: number
    readonly actor: string
    readonly drawAt: Date
    readonly reason: string
  },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const [row] = await tx.db
      .select({ id: person.id, name: person.name })
      .from(person)
      .where(eq(person.id, input.actor))
    const locked = await lockDraw(tx, input)
    requireState(locked.row, ['sealed'], 'postpone it')
    if (await waitingSealing(tx.db, input.draw)) return
    await replaceSeal(tx, services, row ?? null, locked, input.drawAt, input.reason)
  })
  await completeSealing(services, { draw: input.draw })
}

async function moveDates(
  tx: Transaction,
  services: Services,
  actor: CommandActor,
  locked: LockedDraw,
  drawAt: Date,
  reason: string,
  closesAtLocal: string | undefined,
): Promise<void> {
  const { row } = locked
  const moved = closesAtLocal !== undefined && row.state === 'open'
  const closesAt = moved ? readLocalTime('closesAt', closesAtLocal, row.timeZone) : row.closesAt
  if (closesAt > drawAt) throw invalid('closesAt', 'The list must close before the draw. Choose an earlier time.')
  if (moved && closesAt <= services.clock.now()) throw invalid('closesAt', 'Choose a closing time that lies ahead.')
  await tx.db
    .update(draw)
    .set({ drawAt, closesAt, version: row.version + 1 })
    .where(eq(draw.id, row.id))
  await auditPostponing(tx, services, actor, locked, drawAt, reason, closesAt)
  const logIndex = await appendLog(tx, services, { event: 'postponed', ...loggedNames(locked), note: reason })
  if (moved) await services.queue.enqueue(tx.client, 'close', { draw: row.id }, { startAfter: closesAt })
  await services.queue.enqueue(tx.client, 'prepare-mail', { draw: row.id, about: 'notice', logIndex })
}

async function replaceSeal(
  tx: Transaction,
  services: Services,
  actor: CommandActor,
  locked: LockedDraw,
  drawAt: Date,
  reason: string,
): Promise<void> {
  const { row } = locked
  const before = sealInForce(await sealsOf(tx.db, row.id))
  if (!before) throw new Error('A sealed draw has no seal.')
  if (before.beaconRoundAt !== null && services.clock.now() >= before.beaconRoundAt) {
    throw refused(
      'From the time of the beacon round that the seal names nobody can stop, postpone or replace the draw.',
    )
  }
  await putSeal(tx, services, locked, actor, { drawAt, replaces: { seal: before, reason } })
}

const auditPostponing = (
  tx: Transaction,
  services: Services,
  actor: CommandActor,
  { row }: LockedDraw,
  drawAt: Date,
  reason: string,
  closesAt: Date,
) =>
  audit(tx, services, actor, {
    action: 'draw.postpone',
    organisationId: row.organisationId,
    drawId: row.id,
    sentence: `Postponed the draw: ${reason}`,
    before: { closesAt: row.closesAt, drawAt: row.drawAt },
    after: { closesAt, drawAt },
  })
