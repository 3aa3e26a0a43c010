import { and, desc, eq, isNotNull, sql } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { refused } from '#server/commands/command-error.ts'
import { lockDraw } from '#server/commands/draws/lock-draw.ts'
import { lockEntrant } from '#server/commands/entrants/find-entrant.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrantPerson } from '#server/store/schema/entrant.ts'
import { queueEntryMail } from './entry-mail.ts'

/** A request by an address sends at most so many links: those of its newest entries. */
const LINKS_AT_ONCE = 20
/** Two requests within so many milliseconds send one mail. */
const ONE_MAIL_WITHIN = 60_000

/** The office has an entrant's private link mailed again. */
export async function sendEntryLink(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly entrant: number },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    const { row, person } = await lockEntrant(tx, input)
    if (person.email === null) {
      throw refused('This entrant has no e-mail address. Print a slip with their code instead.')
    }
    await queueEntryMail(tx, services, {
      drawId: its.id,
      entrantId: row.id,
      kind: 'entry-link',
      mark: minute(services),
    })
    await audit(tx, services, actor, {
      action: 'entrant.send-link',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(row.id),
      sentence: `Had the private link of ${person.name} (${row.code}) sent again.`,
    })
  })
}

/** Sends the private links of every entry that has this address. Tells nobody whether there is one. */
export async function requestEntryLink(services: Services, input: { readonly email: string }): Promise<void> {
  await inTransaction(services, async (tx) => {
    const rows = await tx.db
      .select({ entrantId: entrantPerson.entrantId, drawId: entrantPerson.drawId })
      .from(entrantPerson)
      .innerJoin(draw, eq(draw.id, entrantPerson.drawId))
      .where(
        and(
          isNotNull(entrantPerson.email),
          sql`lower(${entrantPerson.email}) = ${input.email.trim().toLowerCase()}`,
          isNotNull(draw.openedAt),
        ),
      )
      .orderBy(desc(entrantPerson.entrantId))
      .limit(LINKS_AT_ONCE)
    for (const row of rows) {
      await queueEntryMail(tx, services, { ...row, kind: 'entry-link', mark: minute(services) })
    }
  })
}

const minute = ({ clock }: Services) => String(Math.floor(clock.now().getTime() / ONE_MAIL_WITHIN))
