import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid } from '#server/commands/command-error.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { wholeSecond } from '#server/time/instants.ts'
import { readReason } from './draw-values.ts'
import { discardWaitingSeal } from './discard-sealing.ts'
import { lockDraw, loggedNames, requireState } from './lock-draw.ts'
import { retire } from './put-seal.ts'
import { refuseWhileSealing } from './sealing-job.ts'

/** Cancels a draw for good, with a public reason; `title` must be typed as it stands. Refused from the beacon's round on. */
export async function cancelDraw(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly version: number; readonly reason: string; readonly title: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    const { row } = locked
    requireState(row, ['draft', 'open', 'closed', 'sealed'], 'cancel it')
    await refuseWhileSealing(tx, row.id)
    if (input.title.normalize('NFC').trim() !== row.title) {
      throw invalid('title', `Type the title of the draw as it stands: ${row.title}`)
    }
    const reason = readReason(input.reason)
    await discardWaitingSeal(tx, services, actor, row, 'the draw is cancelled.')
    // The database refuses this from the round's time on, by its own clock.
    await tx.db
      .update(draw)
      .set({ state: 'cancelled', endedAt: wholeSecond(services.clock.now()), version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await retire(
      tx,
      services,
      (await sealsOf(tx.db, row.id)).map(({ id }) => id),
    )
    await audit(tx, services, actor, {
      action: 'draw.cancel',
      organisationId: row.organisationId,
      drawId: row.id,
      sentence: `Cancelled the draw: ${reason}`,
      before: { state: row.state },
    })
    // A draft was never public: nobody outside is told of it.
    if (row.openedAt === null) return
    const logIndex = await appendLog(tx, services, { event: 'cancelled', ...loggedNames(locked), note: reason })
    await services.queue.enqueue(tx.client, 'prepare-mail', { draw: row.id, about: 'notice', logIndex })
  })
}
