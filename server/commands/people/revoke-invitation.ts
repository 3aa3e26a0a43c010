import { and, eq, isNull } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { notFound } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { mail } from '#server/store/schema/operation.ts'
import { invitation, organisation } from '#server/store/schema/people.ts'
import { wholeSecond } from '#server/time/instants.ts'

/** Takes an open invitation back: its link works no more, and a mail that still waits is dropped. */
export async function revokeInvitation(
  services: Services,
  actor: CommandActor,
  input: { readonly organisation: string; readonly invitation: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const [owner] = await tx.db.select().from(organisation).where(eq(organisation.slug, input.organisation))
    if (!owner) throw notFound('organisation')
    const [taken] = await tx.db
      .update(invitation)
      .set({ revokedAt: wholeSecond(services.clock.now()) })
      .where(
        and(
          eq(invitation.id, input.invitation),
          eq(invitation.organisationId, owner.id),
          isNull(invitation.acceptedAt),
          isNull(invitation.revokedAt),
        ),
      )
      .returning()
    if (!taken) throw notFound('open invitation')
    await tx.db
      .update(mail)
      .set({ state: 'dropped' })
      .where(and(eq(mail.key, `invitation:${taken.id}`), eq(mail.state, 'queued')))
    await audit(tx, services, actor, {
      action: 'person.revoke-invitation',
      organisationId: owner.id,
      subjectId: taken.id,
      sentence: `Took back the invitation of ${taken.email}.`,
    })
  })
}
