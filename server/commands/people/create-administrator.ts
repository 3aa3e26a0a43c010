import { eq } from 'drizzle-orm'
import { audit } from '#server/commands/audit.ts'
import { invalid } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { passwordReset, person } from '#server/store/schema/people.ts'
import { newToken, tokenHash } from '#server/store/tokens.ts'
import { wholeSecond } from '#server/time/instants.ts'

/** The first link of an administrator works for so long, in milliseconds. */
const VALID_MS = 24 * 3600 * 1000

/**
 * Makes an administrator of the site, from the command line of the machine that runs it. Returns the link with which they
 * choose their password; it is shown once and works once.
 */
export async function createAdministrator(
  services: Services,
  input: { readonly email: string; readonly name: string; readonly demo?: boolean },
): Promise<{ readonly id: string; readonly link: string; readonly token: string }> {
  const email = input.email.trim().toLowerCase()
  return inTransaction(services, async (tx) => {
    const [known] = await tx.db.select({ id: person.id }).from(person).where(eq(person.email, email))
    if (known) throw invalid('email', 'Somebody has an account with this address already. Use another address.')
    const now = wholeSecond(services.clock.now())
    const [made] = await tx.db
      .insert(person)
      .values({ email, name: input.name, administrator: true, demo: input.demo ?? false, createdAt: now })
      .returning({ id: person.id })
    if (!made) throw new Error('The administrator was not written.')
    const token = newToken(services.entropy)
    await tx.db.insert(passwordReset).values({
      personId: made.id,
      tokenHash: tokenHash(token),
      createdAt: now,
      expiresAt: new Date(now.getTime() + VALID_MS),
    })
    await audit(tx, services, null, {
      action: 'person.create-administrator',
      organisationId: null,
      subjectId: made.id,
      sentence: `${input.name} was made an administrator of the site, from its command line.`,
    })
    return { id: made.id, link: `${services.site.origin}/password-resets/${token}`, token }
  })
}
