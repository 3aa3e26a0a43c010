import { eq } from 'drizzle-orm'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { mailContext } from '#server/commands/account-mail.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrantPerson } from '#server/store/schema/entrant.ts'
import { entryToken } from '#server/store/schema/entry.ts'
import { type mail, mailContent } from '#server/store/schema/operation.ts'
import { newToken, tokenHash } from '#server/store/tokens.ts'

/**
 * The private link that a mail carries: a new token for each mail, the same one however often the mail is tried. It waits
 * encrypted beside the mail and is deleted with its sending; the database keeps its hash. Committed before the mail leaves
 * (in a transaction of its own), so that no mail holds a link that does not work. Null once the entrant was erased.
 */
export async function privateLink(services: Services, row: typeof mail.$inferSelect): Promise<string | null> {
  const { entrantId } = row
  if (entrantId === null) return null
  const token = await inTransaction(services, async (tx) => {
    const [kept] = await tx.db.select().from(mailContent).where(eq(mailContent.mailId, row.id))
    if (kept) return decodeUtf8(services.secrets.open(kept.payload, mailContext(row.key)))
    const [person] = await tx.db
      .select({ id: entrantPerson.entrantId })
      .from(entrantPerson)
      .where(eq(entrantPerson.entrantId, entrantId))
      .for('key share')
    if (!person) return null
    const made = newToken(services.entropy)
    await tx.db.insert(entryToken).values({ tokenHash: tokenHash(made), entrantId, createdAt: services.clock.now() })
    await tx.db
      .insert(mailContent)
      .values({ mailId: row.id, payload: services.secrets.seal(utf8(made), mailContext(row.key)) })
    return made
  })
  return token === null ? null : `${services.site.origin}/entry/${token}`
}
