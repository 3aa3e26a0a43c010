import { and, eq, gt, isNull } from 'drizzle-orm'
import type { Passwords } from '#server/adapters/passwords/passwords.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError, invalid, refused } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { invitation, membership, organisation, person } from '#server/store/schema/people.ts'
import { tokenHash } from '#server/store/tokens.ts'
import { wholeSecond } from '#server/time/instants.ts'
import { password as passwordSchema } from '#shared/schemas/api/session.ts'

/**
 * Accepts an invitation. Somebody new chooses a name and a password; somebody who has an account gives its password. Tells
 * who is to be signed in.
 */
export async function acceptInvitation(
  services: Services & { readonly passwords: Passwords },
  input: { readonly token: string; readonly name?: string | undefined; readonly password: string },
): Promise<{ readonly personId: string }> {
  const hash = tokenHash(input.token)
  const found = await findOpen(services, hash)
  const [known] = await services.db.select().from(person).where(eq(person.email, found.email))
  if (known?.disabledAt) throw refused('This account is closed. Ask the administrator of the site.')
  let newHash: string | null = null
  if (known?.passwordHash) {
    if (!(await services.passwords.verify(input.password, known.passwordHash))) {
      throw new CommandError('wrong-password', 'This is not the password of your account.', [
        { field: 'password', message: 'This is not the password of your account.' },
      ])
    }
  } else {
    if (!input.name && !known?.name) throw invalid('name', 'Type your name.')
    const checked = passwordSchema.safeParse(input.password)
    if (!checked.success) throw invalid('password', checked.error.issues[0]?.message ?? 'Choose another password.')
    newHash = await services.passwords.hash(input.password)
  }
  return inTransaction(services, async (tx) => {
    const now = wholeSecond(services.clock.now())
    const [taken] = await tx.db
      .update(invitation)
      .set({ acceptedAt: now })
      .where(
        and(
          eq(invitation.tokenHash, hash),
          isNull(invitation.acceptedAt),
          isNull(invitation.revokedAt),
          gt(invitation.expiresAt, services.clock.now()),
        ),
      )
      .returning()
    if (!taken) throw expired()
    const [owner] = await tx.db.select().from(organisation).where(eq(organisation.id, taken.organisationId))
    const personId = known?.id ?? (await insertPerson())
    if (known && newHash) {
      await tx.db.update(person).set({ passwordHash: newHash }).where(eq(person.id, known.id))
    }
    await tx.db
      .insert(membership)
      .values({ organisationId: taken.organisationId, personId, role: taken.role, createdAt: now })
      .onConflictDoUpdate({ target: [membership.organisationId, membership.personId], set: { role: taken.role } })
    const name = known?.name ?? input.name ?? ''
    await audit(
      tx,
      services,
      { id: personId, name },
      {
        action: 'person.accept-invitation',
        organisationId: taken.organisationId,
        subjectId: personId,
        sentence: `${name} accepted the invitation as ${taken.role}.`,
      },
    )
    return { personId }

    async function insertPerson(): Promise<string> {
      const [made] = await tx.db
        .insert(person)
        .values({
          email: taken?.email ?? '',
          name: input.name ?? '',
          passwordHash: newHash,
          demo: owner?.demo ?? false,
          createdAt: now,
        })
        .returning({ id: person.id })
      if (!made) throw new Error('The person was not written.')
      return made.id
    }
  })
}

const expired = () =>
  new CommandError('expired', 'This invitation was used, taken back or is too old. Ask for a new one.')

async function findOpen(services: Services, hash: string) {
  const [row] = await services.db
    .select()
    .from(invitation)
    .where(
      and(
        eq(invitation.tokenHash, hash),
        isNull(invitation.acceptedAt),
        isNull(invitation.revokedAt),
        gt(invitation.expiresAt, services.clock.now()),
      ),
    )
  if (!row) throw expired()
  return row
}
