import { and, eq, sql } from 'drizzle-orm'
import type { Database } from '#server/store/database.ts'
import { sealing, timestamping } from '#server/store/schema/seal.ts'
import { instantOf, instantOrNull } from '#server/time/instants.ts'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'

export type SealingRow = typeof sealing.$inferSelect

/** The seal of a draw that was made and waits for its timestamp; null where none does. */
export async function waitingSealing(db: Database, drawId: string): Promise<SealingRow | null> {
  const [row] = await db
    .select()
    .from(sealing)
    .where(and(eq(sealing.drawId, drawId), sql`not exists (select from seal where seal.id = ${sealing.id})`))
  return row ?? null
}

/** A timestamp has to be there so long before the draw, in milliseconds. */
const TIMESTAMP_LEAD_MS = 30_000

/** Until when a seal for a draw time waits for its timestamp. */
export const sealingEnds = (drawAt: Date): Date => new Date(drawAt.getTime() - TIMESTAMP_LEAD_MS)

/** How the waiting goes, for the office; null where no seal waits. */
export async function sealingOf(db: Database, drawId: string): Promise<OfficeDraw['sealing']> {
  const waiting = await waitingSealing(db, drawId)
  if (!waiting) return null
  const [noted] = await db.select().from(timestamping).where(eq(timestamping.sealingId, waiting.id))
  return {
    replaces: waiting.supersedes,
    drawAt: instantOf(waiting.drawAt),
    madeAt: instantOf(waiting.madeAt),
    tries: noted?.tries ?? 0,
    triedAt: instantOrNull(noted?.triedAt ?? null),
    detail: noted?.detail ?? '',
    until: instantOf(sealingEnds(waiting.drawAt)),
  }
}

/** Draws with a seal that has waited since before `due`. */
export async function drawsWithWaitingSeal(db: Database, due: Date): Promise<string[]> {
  const rows = await db
    .select({ drawId: sealing.drawId })
    .from(sealing)
    .where(and(sql`${sealing.madeAt} <= ${due}`, sql`not exists (select from seal where seal.id = ${sealing.id})`))
  return rows.map(({ drawId }) => drawId)
}
