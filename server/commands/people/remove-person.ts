import { and, eq, ne } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { notFound, refused } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { membership, organisation, person } from '#server/store/schema/people.ts'
import { endSessions } from './end-sessions.ts'

/** Takes a person's role away; their sessions end at once. The last promoter stays. */
export async function removePerson(
  services: Services,
  actor: CommandActor,
  input: { readonly organisation: string; readonly person: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const [owner] = await tx.db
      .select()
      .from(organisation)
      .where(eq(organisation.slug, input.organisation))
      .for('update')
    if (!owner) throw notFound('organisation')
    const here = eq(membership.organisationId, owner.id)
    const [held] = await tx.db
      .select({ id: membership.id, role: membership.role, name: person.name })
      .from(membership)
      .innerJoin(person, eq(person.id, membership.personId))
      .where(and(here, eq(membership.personId, input.person)))
    if (!held) throw notFound('person')
    if (held.role === 'promoter') {
      const [other] = await tx.db
        .select({ id: membership.id })
        .from(membership)
        .where(and(here, eq(membership.role, 'promoter'), ne(membership.id, held.id)))
        .limit(1)
      if (!other) throw refused('An organisation needs a promoter. Invite another one before this one leaves.')
    }
    await tx.db.delete(membership).where(eq(membership.id, held.id))
    await endSessions(tx, input.person)
    await audit(tx, services, actor, {
      action: 'person.remove',
      organisationId: owner.id,
      subjectId: input.person,
      sentence: `Took the role of ${held.role} away from ${held.name}.`,
    })
  })
}
