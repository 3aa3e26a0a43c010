import { and, ne, sql } from 'drizzle-orm'
import type { Transaction } from '#server/commands/transaction.ts'
import { session } from '#server/store/schema/people.ts'

/** Ends every session of a person, but for the one whose id is given. */
export async function endSessions(tx: Transaction, personId: string, keep: string | null = null): Promise<void> {
  const theirs = sql`${session.sess} ->> 'personId' = ${personId}`
  await tx.db.delete(session).where(keep === null ? theirs : and(theirs, ne(session.sid, keep)))
}
