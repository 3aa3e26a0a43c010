import { eq } from 'drizzle-orm'
import type { Passwords } from '#server/adapters/passwords/passwords.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { passwordHashOf } from '#server/store/queries/people.ts'
import { person } from '#server/store/schema/people.ts'
import { endSessions } from './end-sessions.ts'

/** Changes a person's password; their other sessions end. `session`: the id of the one that stays. */
export async function changePassword(
  services: Services & { readonly passwords: Passwords },
  actor: { readonly id: string; readonly name: string },
  input: { readonly current: string; readonly password: string; readonly session: string | null },
): Promise<void> {
  if (!(await services.passwords.verify(input.current, await passwordHashOf(services.db, actor.id)))) {
    throw new CommandError('wrong-password', 'This is not your present password.', [
      { field: 'current', message: 'This is not your present password.' },
    ])
  }
  const passwordHash = await services.passwords.hash(input.password)
  await inTransaction(services, async (tx) => {
    await tx.db.update(person).set({ passwordHash }).where(eq(person.id, actor.id))
    await endSessions(tx, actor.id, input.session)
    await audit(tx, services, actor, {
      action: 'person.change-password',
      organisationId: null,
      subjectId: actor.id,
      sentence: `${actor.name} changed their password.`,
    })
  })
}
