import { and, eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { notFound, refused } from '#server/commands/command-error.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw, witness, witnessStatement } from '#server/store/schema/draw.ts'

/** Takes a witness off a draw, before they have said anything. */
export async function removeWitness(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly witness: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row } = await lockDraw(tx, { draw: input.draw })
    requireState(row, ['draft', 'open', 'closed', 'sealed'], 'take a witness off')
    const [found] = await tx.db
      .select()
      .from(witness)
      .where(and(eq(witness.id, input.witness), eq(witness.drawId, row.id)))
    if (!found) throw notFound('witness')
    const [said] = await tx.db
      .select({ id: witnessStatement.id })
      .from(witnessStatement)
      .where(eq(witnessStatement.witnessId, found.id))
      .limit(1)
    if (said) throw refused(`${found.name} has made a statement about this draw, which stays. They stay its witness.`)
    await tx.db.delete(witness).where(eq(witness.id, found.id))
    await tx.db
      .update(draw)
      .set({ version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await audit(tx, services, actor, {
      action: 'witness.remove',
      organisationId: row.organisationId,
      drawId: row.id,
      subjectId: found.id,
      sentence: `Took ${found.name} off as a witness.`,
    })
  })
}
