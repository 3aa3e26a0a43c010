import { and, eq, sql } from 'drizzle-orm'
import type { Database } from '#server/store/database.ts'
import { sealing, timestamping } from '#server/store/schema/seal.ts'

export type SealingRow = typeof sealing.$inferSelect

/** The seal of a draw that was made and waits for its timestamp; null where none does. */
export async function waitingSealing(db: Database, drawId: string): Promise<SealingRow | null> {
  const [row] = await db
    .select()
    .from(sealing)
    .where(and(eq(sealing.drawId, drawId), sql`not exists (select from seal where seal.id = ${sealing.id})`))
  return row ?? null
}

/** How the waiting for its timestamp goes; null before the first try has failed. */
export async function timestampingOf(db: Database, sealingId: number) {
  const [row] = await db.select().from(timestamping).where(eq(timestamping.sealingId, sealingId))
  return row ?? null
}

/** Draws with a seal that has waited since before `due`. */
export async function drawsWithWaitingSeal(db: Database, due: Date): Promise<string[]> {
  const rows = await db
    .select({ drawId: sealing.drawId })
    .from(sealing)
    .where(and(sql`${sealing.madeAt} <= ${due}`, sql`not exists (select from seal where seal.id = ${sealing.id})`))
  return rows.map(({ drawId }) => drawId)
}
