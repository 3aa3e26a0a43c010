import { and, eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid } from '#server/commands/command-error.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw, witness } from '#server/store/schema/draw.ts'
import { membership } from '#server/store/schema/people.ts'

export interface NameWitnessInput {
  readonly draw: string
  readonly name: string
  readonly role: string
  readonly connection: string
  /** An account that holds the role of witness in the organisation. */
  readonly person: string | null
}

/** Names a witness of a draw, before it is drawn. */
export async function nameWitness(
  services: Services,
  actor: CommandActor,
  input: NameWitnessInput,
): Promise<{ readonly id: string }> {
  return inTransaction(services, async (tx) => {
    const { row } = await lockDraw(tx, input)
    requireState(row, ['draft', 'open', 'closed', 'sealed'], 'name a witness')
    if (input.person !== null) {
      const [held] = await tx.db
        .select({ role: membership.role })
        .from(membership)
        .where(and(eq(membership.organisationId, row.organisationId), eq(membership.personId, input.person)))
      if (held?.role !== 'witness') {
        throw invalid(
          'person',
          'Choose a person who has the role of witness here: organisers and promoters are not independent.',
        )
      }
      const [named] = await tx.db
        .select({ id: witness.id })
        .from(witness)
        .where(and(eq(witness.drawId, row.id), eq(witness.personId, input.person)))
      if (named) throw invalid('person', 'This person is a witness of the draw already.')
    }
    const [made] = await tx.db
      .insert(witness)
      .values({
        drawId: row.id,
        personId: input.person,
        name: input.name,
        role: input.role,
        connection: input.connection,
        createdAt: services.clock.now(),
      })
      .returning({ id: witness.id })
    if (!made) throw new Error('The witness was not written.')
    await tx.db
      .update(draw)
      .set({ version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await audit(tx, services, actor, {
      action: 'witness.name',
      organisationId: row.organisationId,
      drawId: row.id,
      subjectId: made.id,
      sentence: `Named ${input.name} as a witness: ${input.role}.`,
    })
    return { id: made.id }
  })
}
