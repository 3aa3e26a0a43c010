import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrant, entrantNumbers, entrantPerson } from '#server/store/schema/entrant.ts'
import { checkTotal, type EntrantInput, entrantValues, putNumbers } from './entrant-values.ts'
import { lockEntrant } from './find-entrant.ts'

/** Changes an entrant before the list is closed. */
export async function updateEntrant(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly entrant: number; readonly version: number; readonly values: EntrantInput },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    requireState(its, ['open'], 'change entrants')
    const { row, person: before } = await lockEntrant(tx, input)
    if (row.version !== input.version) {
      throw new CommandError(
        'changed',
        'Somebody changed this entrant since you opened the form. Load the list again and repeat your change.',
      )
    }
    const { ranges, ...person } = entrantValues(input.values)
    checkTotal(its.ticketCount - row.tickets, input.values.tickets)
    await tx.db
      .update(entrant)
      .set({ tickets: input.values.tickets, version: row.version + 1 })
      .where(eq(entrant.id, row.id))
    await tx.db.update(entrantPerson).set(person).where(eq(entrantPerson.entrantId, row.id))
    await tx.db.delete(entrantNumbers).where(eq(entrantNumbers.entrantId, row.id))
    await putNumbers(tx, { drawId: its.id, entrantId: row.id }, ranges)
    const { name, label, email, phone, numbers } = before
    await audit(tx, services, actor, {
      action: 'entrant.update',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(row.id),
      sentence: `Changed ${person.name} (${row.code}).`,
      before: { name, label, email, phone, numbers, tickets: row.tickets },
      after: { ...person, tickets: input.values.tickets },
    })
  })
}
