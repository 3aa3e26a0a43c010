import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrant } from '#server/store/schema/entrant.ts'
import { lockEntrant } from './find-entrant.ts'

/** Takes an entrant out of the list before it is closed, with a reason for the audit trail. */
export async function removeEntrant(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly entrant: number; readonly reason: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    requireState(its, ['open'], 'take entrants out')
    const { row, person } = await lockEntrant(tx, input)
    await tx.db.delete(entrant).where(eq(entrant.id, row.id))
    const { name, label, email, phone, numbers } = person
    await audit(tx, services, actor, {
      action: 'entrant.remove',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(row.id),
      sentence: `Took out ${name} (${row.code}) with ${row.tickets} tickets: ${input.reason}`,
      before: { name, label, email, phone, numbers, tickets: row.tickets },
    })
  })
}
