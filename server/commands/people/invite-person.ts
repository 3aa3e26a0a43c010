import { and, eq, isNull } from 'drizzle-orm'
import type { Role } from '#shared/schemas/values.ts'
import { type AccountMail, queueAccountMail } from '#server/commands/account-mail.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid, notFound } from '#server/commands/command-error.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { invitation, membership, organisation, person } from '#server/store/schema/people.ts'
import { newToken, tokenHash } from '#server/store/tokens.ts'
import { instantOf, wholeSecond } from '#server/time/instants.ts'

/** An invitation's link works for so long, in milliseconds. */
const VALID_MS = 14 * 24 * 3600 * 1000

/** Invites a person to a role by mail. An earlier open invitation of the same address is taken back. */
export async function invitePerson(
  services: Services,
  actor: { readonly id: string; readonly name: string },
  input: { readonly organisation: string; readonly email: string; readonly role: Role },
): Promise<{ readonly id: string }> {
  return inTransaction(services, async (tx) => {
    const [owner] = await tx.db
      .select()
      .from(organisation)
      .where(eq(organisation.slug, input.organisation))
      .for('update')
    if (!owner) throw notFound('organisation')
    return invite(tx, services, actor, owner, { email: input.email, role: input.role })
  })
}

/** The same inside another command's transaction. */
export async function invite(
  tx: Transaction,
  services: Services,
  actor: NonNullable<CommandActor>,
  owner: typeof organisation.$inferSelect,
  input: { readonly email: string; readonly role: Role },
): Promise<{ readonly id: string }> {
  const email = input.email.trim().toLowerCase()
  const [known] = await tx.db
    .select({ administrator: person.administrator, role: membership.role })
    .from(person)
    .leftJoin(membership, and(eq(membership.personId, person.id), eq(membership.organisationId, owner.id)))
    .where(eq(person.email, email))
  if (known?.administrator)
    throw invalid('email', 'This person is an administrator of the site, who can hold no role here.')
  if (known?.role)
    throw invalid('email', `This person is ${known.role} here already. Take that role away first to give another.`)
  const now = wholeSecond(services.clock.now())
  await tx.db
    .update(invitation)
    .set({ revokedAt: now })
    .where(
      and(
        eq(invitation.organisationId, owner.id),
        eq(invitation.email, email),
        isNull(invitation.acceptedAt),
        isNull(invitation.revokedAt),
      ),
    )
  const token = newToken(services.entropy)
  const expiresAt = new Date(now.getTime() + VALID_MS)
  const [made] = await tx.db
    .insert(invitation)
    .values({
      organisationId: owner.id,
      email,
      role: input.role,
      tokenHash: tokenHash(token),
      invitedBy: actor.id,
      invitedByName: actor.name,
      sentAt: now,
      expiresAt,
    })
    .returning({ id: invitation.id })
  if (!made) throw new Error('The invitation was not written.')
  const content: AccountMail = {
    kind: 'invitation',
    to: email,
    link: `${services.site.origin}/invitations/${token}`,
    organisation: owner.name,
    role: input.role,
    invitedBy: actor.name,
    expiresAt: instantOf(expiresAt),
  }
  await queueAccountMail(tx, services, `invitation:${made.id}`, content)
  await audit(tx, services, actor, {
    action: 'person.invite',
    organisationId: owner.id,
    subjectId: made.id,
    sentence: `Invited ${email} as ${input.role}.`,
  })
  return { id: made.id }
}
