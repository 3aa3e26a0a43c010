import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { refused } from '#server/commands/command-error.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { problemsOfOpening } from '#server/store/draw-problems.ts'
import { factsOf, prizeRowsOf } from '#server/store/queries/office-draws.ts'
import { draw } from '#server/store/schema/draw.ts'
import { wholeSecond } from '#server/time/instants.ts'
import { lockDraw, loggedNames, requireState } from './lock-draw.ts'

/** Publishes the terms and opens a draft for entries; from now on its address is fixed. */
export async function openDraw(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly version: number },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    const { row } = locked
    requireState(row, ['draft'], 'open it')
    const now = services.clock.now()
    const problems = problemsOfOpening(factsOf(row, locked.organisation, await prizeRowsOf(tx.db, row.id)), now)
    if (problems.length > 0) throw refused(problems.join(' '))
    await tx.db
      .update(draw)
      .set({ state: 'open', openedAt: wholeSecond(now), version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await audit(tx, services, actor, {
      action: 'draw.open',
      organisationId: row.organisationId,
      drawId: row.id,
      sentence: 'Published the terms and opened the draw for entries.',
    })
    await appendLog(tx, services, { event: 'opened', ...loggedNames(locked) })
    await services.queue.enqueue(tx.client, 'close', { draw: row.id }, { startAfter: row.closesAt })
  })
}
