import { asc, eq, isNull } from 'drizzle-orm'
import { utf8 } from '#shared/bytes/bytes.ts'
import { sourceOfBytes } from '#server/adapters/object-store/put-source.ts'
import { putCheckpoint } from '#server/commands/put-checkpoint.ts'
import type { Services } from '#server/services.ts'
import { logCheckpoint } from '#server/store/schema/record.ts'

/** Where a checkpoint lies in the object store. */
export const checkpointKey = (size: number): string => `checkpoints/${size}.txt`

/**
 * Makes a checkpoint if one is due, and puts every one that is not there yet into the object store, under a lock where
 * the bucket has one, never over another. A second run finds the first one's object. Returns how many were stored.
 */
export async function storeCheckpoints(services: Services): Promise<number> {
  await putCheckpoint(services)
  const waiting = await services.db
    .select({ size: logCheckpoint.size, note: logCheckpoint.note })
    .from(logCheckpoint)
    .where(isNull(logCheckpoint.storedAt))
    .orderBy(asc(logCheckpoint.size))
  for (const { size, note } of waiting) {
    await services.store.put(checkpointKey(size), sourceOfBytes(utf8(note)), 'text/plain; charset=utf-8')
    // Another run may have noted it meanwhile; what is noted is not changed again.
    await services.db.transaction(async (tx) => {
      const [row] = await tx.select().from(logCheckpoint).where(eq(logCheckpoint.size, size)).for('update')
      if (row?.storedAt !== null) return
      await tx.update(logCheckpoint).set({ storedAt: services.clock.now() }).where(eq(logCheckpoint.size, size))
    })
  }
  return waiting.length
}
