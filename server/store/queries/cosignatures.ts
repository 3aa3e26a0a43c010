import { and, asc, eq, gt, lt } from 'drizzle-orm'
import type { WitnessAddress } from '#shared/log/add-checkpoint.ts'
import { formatVkey } from '#shared/log/signed-note.ts'
import type { Database } from '#server/store/database.ts'
import { logCosignature, logWitness } from '#server/store/schema/record.ts'

/** The signature lines of witnesses under the log's head of a size. */
export async function cosignatureLines(db: Database, size: number): Promise<readonly string[]> {
  const rows = await db
    .select({ line: logCosignature.line })
    .from(logCosignature)
    .where(eq(logCosignature.size, size))
    .orderBy(asc(logCosignature.witness))
  return rows.map(({ line }) => line)
}

/**
 * The size at which most witnesses cosigned the log with an entry in it before an instant, the smallest of those; null
 * where none did.
 */
export async function witnessedSize(db: Database, index: number, before: Date): Promise<number | null> {
  const rows = await db
    .select({ size: logCosignature.size })
    .from(logCosignature)
    .where(and(gt(logCosignature.size, index), lt(logCosignature.at, before)))
    .orderBy(asc(logCosignature.size))
  const counts = new Map<number, number>()
  for (const { size } of rows) counts.set(size, (counts.get(size) ?? 0) + 1)
  const most = Math.max(0, ...counts.values())
  return [...counts].find(([, count]) => count === most)?.[0] ?? null
}

/** How far a witness has followed the log. */
export async function witnessState(db: Database, witness: string): Promise<typeof logWitness.$inferSelect | null> {
  const [row] = await db.select().from(logWitness).where(eq(logWitness.witness, witness))
  return row ?? null
}

/** What became of the log at each configured witness, for the administrator. */
export async function witnessStates(db: Database, witnesses: readonly WitnessAddress[]) {
  const rows = await db.select().from(logWitness)
  return witnesses.map(({ key, url }) => {
    const row = rows.find(({ witness }) => witness === formatVkey(key))
    return {
      name: key.name,
      address: url,
      ok: row?.ok ?? false,
      size: row?.size ?? 0,
      detail: row?.detail ?? 'No checkpoint was sent to it yet.',
    }
  })
}
