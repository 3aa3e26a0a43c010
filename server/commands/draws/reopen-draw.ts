import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid } from '#server/commands/command-error.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'
import { readLocalTime, readReason } from './draw-values.ts'
import { discardWaitingSeal } from './discard-sealing.ts'
import { lockDraw, loggedNames, requireState } from './lock-draw.ts'
import { refuseWhileSealing } from './sealing-job.ts'

/** Reopens a closed list until a new closing time, with a public reason. */
export async function reopenDraw(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly version: number; readonly reason: string; readonly closesAt: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    const { row } = locked
    requireState(row, ['closed'], 'reopen it')
    await refuseWhileSealing(tx, row.id)
    const closesAt = readLocalTime('closesAt', input.closesAt, row.timeZone)
    if (closesAt <= services.clock.now()) throw invalid('closesAt', 'Choose a closing time that lies ahead.')
    if (closesAt > row.drawAt) {
      throw invalid(
        'closesAt',
        'The list must close before the draw. Choose an earlier time, or postpone the draw first.',
      )
    }
    const reason = readReason(input.reason)
    await discardWaitingSeal(tx, services, actor, row, 'the list takes entrants again.')
    await tx.db
      .update(draw)
      .set({ state: 'open', closedAt: null, closesAt, version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await audit(tx, services, actor, {
      action: 'draw.reopen',
      organisationId: row.organisationId,
      drawId: row.id,
      sentence: `Reopened the list: ${reason}`,
      before: { closesAt: row.closesAt },
      after: { closesAt },
    })
    // The log's words have no "reopened": opening again is opening, and the note says why.
    await appendLog(tx, services, { event: 'opened', ...loggedNames(locked), note: reason })
    await services.queue.enqueue(tx.client, 'close', { draw: row.id }, { startAfter: closesAt })
  })
}
