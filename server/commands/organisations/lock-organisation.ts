import { eq } from 'drizzle-orm'
import { CommandError, notFound } from '#server/commands/command-error.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import { organisation } from '#server/store/schema/people.ts'

/** Locks an organisation, named by its slug, in the version that the form was filled from. */
export async function lockOrganisation(
  tx: Transaction,
  input: { readonly organisation: string; readonly version: number },
): Promise<typeof organisation.$inferSelect> {
  const [row] = await tx.db.select().from(organisation).where(eq(organisation.slug, input.organisation)).for('update')
  if (!row) throw notFound('organisation')
  if (row.version !== input.version) {
    throw new CommandError(
      'changed',
      'Somebody changed this organisation since you opened the page. Load it again and repeat your change.',
    )
  }
  return row
}
