import { eq } from 'drizzle-orm'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { membership, person } from '#server/store/schema/people.ts'
import { sendLink } from './request-password-reset.ts'

/**
 * Makes an administrator and mails them a link to set a password; somebody who already has an account gets the right
 * and a link all the same. Only from the command line of the machine: nobody gives this right over the site. Refuses a
 * person with a role in an organisation: an administrator holds none.
 */
export async function makeAdministrator(
  services: Services,
  input: { readonly email: string; readonly name: string },
): Promise<void> {
  const email = input.email.trim().toLowerCase()
  await inTransaction(services, async (tx) => {
    const [known] = await tx.db.select().from(person).where(eq(person.email, email)).for('update')
    if (known) {
      const roles = await tx.db.select().from(membership).where(eq(membership.personId, known.id))
      if (roles.length > 0) {
        throw new CommandError(
          'refused',
          'This person has a role in an organisation, and an administrator holds none. Have their promoter remove them first, or use another address.',
        )
      }
      await tx.db.update(person).set({ administrator: true }).where(eq(person.id, known.id))
    } else {
      await tx.db.insert(person).values({ email, name: input.name.trim(), administrator: true })
    }
    const [made] = await tx.db.select().from(person).where(eq(person.email, email))
    if (!made) throw new Error('The person was not written.')
    await sendLink(tx, services, null, made)
    await audit(tx, services, null, {
      action: 'person.make-administrator',
      organisationId: null,
      subjectId: made.id,
      sentence: `${made.name} was made an administrator, from the command line.`,
    })
  })
}
