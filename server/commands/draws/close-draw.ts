import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'
import { wholeSecond } from '#server/time/instants.ts'
import { lockDraw, type LockedDraw, loggedNames, requireState } from './lock-draw.ts'

/** Closes the list now. */
export async function closeDraw(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly version: number },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    requireState(locked.row, ['open'], 'close it')
    await close(tx, services, actor, locked, 'Closed the list.')
  })
}

/**
 * Closes the list if its closing time has come: the worker's part. Does nothing to a draw that is closed already, or
 * whose closing time was moved; then tells when that is.
 */
export async function closeDueDraw(
  services: Services,
  input: { readonly draw: string },
): Promise<{ readonly kind: 'closed' | 'nothing' } | { readonly kind: 'later'; readonly at: Date }> {
  return inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    if (locked.row.state !== 'open') return { kind: 'nothing' }
    if (locked.row.closesAt > services.clock.now()) return { kind: 'later', at: locked.row.closesAt }
    await close(tx, services, null, locked, 'The closing time came: the list was closed.')
    return { kind: 'closed' }
  })
}

async function close(
  tx: Transaction,
  services: Services,
  actor: CommandActor,
  locked: LockedDraw,
  sentence: string,
): Promise<void> {
  const { row } = locked
  await tx.db
    .update(draw)
    .set({ state: 'closed', closedAt: wholeSecond(services.clock.now()), version: row.version + 1 })
    .where(eq(draw.id, row.id))
  await audit(tx, services, actor, {
    action: 'draw.close',
    organisationId: row.organisationId,
    drawId: row.id,
    sentence,
    after: { entrants: row.entrantCount, tickets: row.ticketCount },
  })
  await appendLog(tx, services, { event: 'closed', ...loggedNames(locked) })
}
