import { and, eq } from 'drizzle-orm'
import { notFound } from '#server/commands/command-error.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'

/** Locks an entrant of a draw. */
export async function lockEntrant(tx: Transaction, input: { readonly draw: string; readonly entrant: number }) {
  const [row] = await tx.db
    .select()
    .from(entrant)
    .where(and(eq(entrant.drawId, input.draw), eq(entrant.id, input.entrant)))
    .for('update')
  const [person] = await tx.db.select().from(entrantPerson).where(eq(entrantPerson.entrantId, input.entrant))
  if (!row || !person) throw notFound('entrant')
  return { row, person }
}
