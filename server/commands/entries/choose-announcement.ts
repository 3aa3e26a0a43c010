import { eq } from 'drizzle-orm'
import { announcedAs, type Announcement } from '#shared/entrants/announcement.ts'
import { audit } from '#server/commands/audit.ts'
import { refused } from '#server/commands/command-error.ts'
import { lockDraw } from '#server/commands/draws/lock-draw.ts'
import { lockEntrant } from '#server/commands/entrants/find-entrant.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'

const WORDS: Readonly<Record<Announcement, string>> = {
  label: 'by the words that the organiser wrote',
  initials: 'by their initials',
  code: 'by their code alone',
}

/** An entrant chooses how they are announced if they win. Their chance is the same whatever they choose. */
export async function chooseAnnouncement(
  services: Services,
  input: { readonly draw: string; readonly entrant: number; readonly choice: Announcement },
): Promise<void> {
  const { choice } = input
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    if (its.state !== 'open') {
      throw refused('The list is closed, so how you are announced can no longer be chosen. Write to the promoter.')
    }
    const { row, person } = await lockEntrant(tx, input)
    if (person.announced === choice) return
    const given = person.givenLabel ?? person.label
    await tx.db
      .update(entrant)
      .set({ version: row.version + 1 })
      .where(eq(entrant.id, row.id))
    await tx.db
      .update(entrantPerson)
      .set({
        announced: choice,
        label: announcedAs(choice, { name: person.name, label: given, code: row.code }),
        givenLabel: choice === 'label' ? null : given,
      })
      .where(eq(entrantPerson.entrantId, row.id))
    await audit(tx, services, null, {
      action: 'entrant.choose-announcement',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(row.id),
      sentence: `${person.name} (${row.code}) chose on their private page to be announced ${WORDS[choice]}.`,
      before: { announced: person.announced },
      after: { announced: choice },
    })
  })
}
