import { MAX_ENTRANTS } from '#shared/protocol/limits.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { refused } from '#server/commands/command-error.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { queueEntryMail } from '#server/commands/entries/entry-mail.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import { newEntrantCode } from './codes.ts'
import { checkTotal, type EntrantInput, entrantValues, putNumbers } from './entrant-values.ts'

/** Adds one entrant by hand. */
export async function addEntrant(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly entrant: EntrantInput },
): Promise<{ readonly id: number }> {
  return inTransaction(services, async (tx) => {
    const { row } = await lockDraw(tx, input)
    requireState(row, ['open'], 'add entrants')
    if (row.entrantCount >= MAX_ENTRANTS) throw refused('A draw holds at most 2,000,000 entrants.')
    checkTotal(row.ticketCount, input.entrant.tickets)
    const { ranges, ...person } = entrantValues(input.entrant)
    const [added] = await tx.db
      .insert(entrant)
      .values({
        drawId: row.id,
        code: newEntrantCode(services.entropy),
        tickets: input.entrant.tickets,
        source: 'by-hand',
        addedAt: services.clock.now(),
      })
      .returning({ id: entrant.id, code: entrant.code })
    if (!added) throw new Error('The entrant was not written.')
    await tx.db.insert(entrantPerson).values({ entrantId: added.id, drawId: row.id, ...person })
    await putNumbers(tx, { drawId: row.id, entrantId: added.id }, ranges)
    await audit(tx, services, actor, {
      action: 'entrant.add',
      organisationId: row.organisationId,
      drawId: row.id,
      subjectId: String(added.id),
      sentence: `Added ${person.name} (${added.code}) with ${input.entrant.tickets} tickets.`,
      after: { ...person, tickets: input.entrant.tickets },
    })
    if (person.email !== null) await queueEntryMail(tx, services, { drawId: row.id, entrantId: added.id })
    return { id: added.id }
  })
}
