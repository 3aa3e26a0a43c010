import { eq } from 'drizzle-orm'
import type { DrawState } from '#shared/schemas/values.ts'
import { CommandError, notFound, refused } from '#server/commands/command-error.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'

export interface LockedDraw {
  readonly row: typeof draw.$inferSelect
  readonly organisation: typeof organisation.$inferSelect
}

/** Locks a draw until the end of the transaction, so that two writes of it never cross. */
export async function lockDraw(
  tx: Transaction,
  input: { readonly draw: string; readonly version?: number },
): Promise<LockedDraw> {
  const [row] = await tx.db.select().from(draw).where(eq(draw.id, input.draw)).for('update')
  if (!row) throw notFound('draw')
  const [owner] = await tx.db.select().from(organisation).where(eq(organisation.id, row.organisationId))
  if (!owner) throw notFound('draw')
  if (input.version !== undefined && input.version !== row.version) {
    throw new CommandError(
      'changed',
      'Somebody changed this draw since you opened the page. Load it again, look at what is there now, and repeat your change.',
    )
  }
  return { row, organisation: owner }
}

/** Refuses unless the draw is in one of the states. `doing` completes "You cannot …". */
export function requireState(row: { readonly state: DrawState }, states: readonly DrawState[], doing: string): void {
  if (!states.includes(row.state)) throw refused(`This draw is ${row.state}: you cannot ${doing} now.`)
}

/** The draw's and the organisation's names for the log. */
export const loggedNames = ({ row, organisation: owner }: LockedDraw) => ({
  draw: { id: row.id, slug: row.slug },
  organisation: { id: owner.id, slug: owner.slug },
})
