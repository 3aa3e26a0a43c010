import { eq } from 'drizzle-orm'
import { announcedAs } from '#shared/entrants/announcement.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { queueEntryMail } from '#server/commands/entries/entry-mail.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrant, entrantNumbers, entrantPerson } from '#server/store/schema/entrant.ts'
import { entryToken } from '#server/store/schema/entry.ts'
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
    const { ranges, ...typed } = entrantValues(input.values)
    const person = { ...typed, ...labelsOf(before, typed, row.code) }
    checkTotal(its.ticketCount - row.tickets, input.values.tickets)
    await tx.db
      .update(entrant)
      .set({ tickets: input.values.tickets, version: row.version + 1 })
      .where(eq(entrant.id, row.id))
    await tx.db.update(entrantPerson).set(person).where(eq(entrantPerson.entrantId, row.id))
    await tx.db.delete(entrantNumbers).where(eq(entrantNumbers.entrantId, row.id))
    await putNumbers(tx, { drawId: its.id, entrantId: row.id }, ranges)
    const { name, label, email, phone, numbers } = before
    if (email?.toLowerCase() !== person.email?.toLowerCase()) {
      // Whoever reads the old address has no business with this entry any more.
      await tx.db.delete(entryToken).where(eq(entryToken.entrantId, row.id))
      if (person.email !== null) {
        await queueEntryMail(tx, services, { drawId: its.id, entrantId: row.id, mark: String(row.version + 1) })
      }
    }
    await audit(tx, services, actor, {
      action: 'entrant.update',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(row.id),
      sentence: `Changed ${person.name} (${row.code}).`,
      before: { name, label, email, phone, numbers, tickets: row.tickets },
      after: { ...typed, label: person.label, tickets: input.values.tickets },
    })
  })
}

/** The label that counts after the office typed one: an entrant's own choice stands, and what was typed waits behind it. */
function labelsOf(
  before: typeof entrantPerson.$inferSelect,
  typed: { readonly name: string; readonly label: string },
  code: string,
): { readonly label: string; readonly givenLabel: string | null } {
  if (before.announced === 'label') return { label: typed.label, givenLabel: null }
  // The form was filled with the words that count: left as they were, they say nothing about the label behind.
  const given = typed.label === before.label ? (before.givenLabel ?? typed.label) : typed.label
  return { label: announcedAs(before.announced, { name: typed.name, label: given, code }), givenLabel: given }
}
