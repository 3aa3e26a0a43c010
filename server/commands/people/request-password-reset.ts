import { and, eq, isNull } from 'drizzle-orm'
import { queueAccountMail } from '#server/commands/account-mail.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { notFound } from '#server/commands/command-error.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { passwordReset, person } from '#server/store/schema/people.ts'
import { newToken, tokenHash } from '#server/store/tokens.ts'
import { instantOf, wholeSecond } from '#server/time/instants.ts'

/** A reset link works for so long, in milliseconds. */
const VALID_MS = 60 * 60 * 1000

/** Sends a link to set a new password, where the address is known. Tells nobody whether it is. */
export async function requestPasswordReset(services: Services, input: { readonly email: string }): Promise<void> {
  await inTransaction(services, async (tx) => {
    const [found] = await tx.db
      .select()
      .from(person)
      .where(and(eq(person.email, input.email.trim().toLowerCase()), isNull(person.disabledAt)))
    if (found) await sendLink(tx, services, null, found)
  })
}

/** An administrator helps a person back in. */
export async function sendPasswordReset(
  services: Services,
  actor: CommandActor,
  input: { readonly person: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const [found] = await tx.db.select().from(person).where(eq(person.id, input.person))
    if (!found || found.disabledAt) throw notFound('person')
    await sendLink(tx, services, actor, found)
  })
}

async function sendLink(
  tx: Transaction,
  services: Services,
  actor: CommandActor,
  found: typeof person.$inferSelect,
): Promise<void> {
  const now = wholeSecond(services.clock.now())
  const token = newToken(services.entropy)
  const expiresAt = new Date(now.getTime() + VALID_MS)
  const [made] = await tx.db
    .insert(passwordReset)
    .values({ personId: found.id, tokenHash: tokenHash(token), createdAt: now, expiresAt })
    .returning({ id: passwordReset.id })
  if (!made) throw new Error('The reset link was not written.')
  await queueAccountMail(tx, services, `password-reset:${made.id}`, {
    kind: 'password-reset',
    to: found.email,
    link: `${services.site.origin}/password-resets/${token}`,
    name: found.name,
    expiresAt: instantOf(expiresAt),
  })
  await audit(tx, services, actor, {
    action: 'person.password-reset-link',
    organisationId: null,
    subjectId: found.id,
    sentence: `A link to set a new password was sent to ${found.name}.`,
  })
}
