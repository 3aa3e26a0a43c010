import { and, eq, gt, isNull } from 'drizzle-orm'
import type { Passwords } from '#server/adapters/passwords/passwords.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { passwordReset, person } from '#server/store/schema/people.ts'
import { tokenHash } from '#server/store/tokens.ts'
import { endSessions } from './end-sessions.ts'

/** Sets a new password by a link from a mail. The link, and all others of the person, work no more; every session ends. */
export async function resetPassword(
  services: Services & { readonly passwords: Passwords },
  input: { readonly token: string; readonly password: string },
): Promise<void> {
  const hash = tokenHash(input.token)
  const open = and(
    eq(passwordReset.tokenHash, hash),
    isNull(passwordReset.usedAt),
    gt(passwordReset.expiresAt, services.clock.now()),
  )
  const expired = new CommandError('expired', 'This link was used or is too old. Ask for a new one.')
  // Looked at first, so that guessing tokens costs the site no bcrypt.
  const [found] = await services.db.select({ id: passwordReset.id }).from(passwordReset).where(open)
  if (!found) throw expired
  const passwordHash = await services.passwords.hash(input.password)
  await inTransaction(services, async (tx) => {
    const now = services.clock.now()
    const [used] = await tx.db.update(passwordReset).set({ usedAt: now }).where(open).returning()
    if (!used) throw expired
    await tx.db
      .update(passwordReset)
      .set({ usedAt: now })
      .where(and(eq(passwordReset.personId, used.personId), isNull(passwordReset.usedAt)))
    const [row] = await tx.db
      .update(person)
      .set({ passwordHash })
      .where(and(eq(person.id, used.personId), isNull(person.disabledAt)))
      .returning()
    if (!row) throw expired
    await endSessions(tx, row.id)
    await audit(tx, services, row, {
      action: 'person.reset-password',
      organisationId: null,
      subjectId: row.id,
      sentence: `${row.name} set a new password by a link from a mail.`,
    })
  })
}
