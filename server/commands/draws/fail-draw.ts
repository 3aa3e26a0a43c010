import { eq } from 'drizzle-orm'
import { audit } from '#server/commands/audit.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { wholeSecond } from '#server/time/instants.ts'
import { lockDraw, loggedNames } from './lock-draw.ts'
import { retire } from './put-seal.ts'

/** If nobody can show the round for so long after its time, the draw stands as failed (PROTOCOL section 3). */
export const FAILED_AFTER_MS = 7 * 24 * 3600 * 1000

const WHY =
  'The beacon round that the seal names could not be shown by anybody for seven days. The seed is destroyed unopened.'

/** Lets a draw stand as failed, for good; its seed is destroyed unopened. The worker's part. */
export async function failDraw(services: Services, input: { readonly draw: string }): Promise<boolean> {
  return inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    const { row } = locked
    const inForce = sealInForce(await sealsOf(tx.db, row.id))
    if (row.state !== 'sealed' || !inForce?.beaconRoundAt) return false
    if (services.clock.now().getTime() < inForce.beaconRoundAt.getTime() + FAILED_AFTER_MS) return false
    await tx.db
      .update(draw)
      .set({ state: 'failed', endedAt: wholeSecond(services.clock.now()), version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await retire(tx, services, [inForce.id])
    await audit(tx, services, null, {
      action: 'draw.fail',
      organisationId: row.organisationId,
      drawId: row.id,
      sentence: WHY,
    })
    const logIndex = await appendLog(tx, services, {
      event: 'failed',
      ...loggedNames(locked),
      digest: inForce.digest,
      note: WHY,
    })
    await services.queue.enqueue(tx.client, 'prepare-mail', { draw: row.id, about: 'notice', logIndex })
    return true
  })
}
