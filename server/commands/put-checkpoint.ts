import { desc, ne, sql } from 'drizzle-orm'
import { toHex } from '#shared/bytes/hex.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { signedHead } from '#server/store/queries/log-head.ts'
import { storedCheckpoint } from '#server/store/queries/log-tree.ts'
import { logCheckpoint, logEvent } from '#server/store/schema/record.ts'
import { wholeSecond } from '#server/time/instants.ts'

/**
 * Signs the log as it stands and notes it for the object store, where something was added since the last checkpoint
 * besides the entry of that checkpoint itself. Returns the size, or null where there was nothing to sign.
 */
export async function putCheckpoint(services: Services): Promise<number | null> {
  return inTransaction(services, async (tx) => {
    // Takes the log's lock: nothing is appended between the head and the entry that tells of it.
    await tx.db.execute(sql`select log_next_index()`)
    if (!(await checkpointIsDue(tx.db))) return null
    const { head, note } = await signedHead(tx.db, services)
    const { size, root } = head
    await tx.db.insert(logCheckpoint).values({ size, root, note, at: wholeSecond(services.clock.now()) })
    const digest = toHex(services.sha256(utf8(note)))
    await appendLog(tx, services, { event: 'checkpointed', organisation: null, draw: null, digest })
    return size
  })
}

/** Whether the log has an entry behind its last checkpoint that is not that checkpoint's own. */
export async function checkpointIsDue(db: Database): Promise<boolean> {
  const [last] = await db
    .select({ index: logEvent.index })
    .from(logEvent)
    .where(ne(logEvent.event, 'checkpointed'))
    .orderBy(desc(logEvent.index))
    .limit(1)
  if (!last) return false
  const newest = await storedCheckpoint(db)
  return newest === null || last.index >= newest.size
}
