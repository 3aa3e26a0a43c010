import { and, asc, desc, eq, gte, inArray, lt, max, sql } from 'drizzle-orm'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { consistencyNodes, inclusionNodes, type LogNodeRun, rootNodes, runHash } from '#shared/merkle/log-nodes.ts'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import type { Database } from '#server/store/database.ts'
import { logCheckpoint, logEvent, logNode } from '#server/store/schema/record.ts'

/** How many entries the log has. */
export async function logSize(db: Database): Promise<number> {
  const [row] = await db.select({ last: max(logEvent.index) }).from(logEvent)
  return row?.last === null || row?.last === undefined ? 0 : row.last + 1
}

/** Root of the first `size` entries. Throws a RangeError where the log has fewer. */
export async function logRoot(db: Database, sha256: Sha256, size: number): Promise<Uint8Array> {
  if (size === 0) return sha256(new Uint8Array(0))
  const [root] = await hashRuns(db, sha256, [rootNodes(size)])
  return root as Uint8Array
}

/** Siblings of an entry in the log of `size` entries. Throws a RangeError where there is no such entry or size. */
export async function logInclusionProof(
  db: Database,
  sha256: Sha256,
  index: number,
  size: number,
): Promise<readonly Uint8Array[]> {
  return hashRuns(db, sha256, inclusionNodes(index, size))
}

/** The proof that the first `first` of `second` entries are its beginning. Throws a RangeError as above. */
export async function logConsistencyProof(
  db: Database,
  sha256: Sha256,
  first: number,
  second: number,
): Promise<readonly Uint8Array[]> {
  return hashRuns(db, sha256, consistencyNodes(first, second))
}

/** Leaves of a draw in a log of `size` entries, in order, each with its path. */
export async function provenEntriesOf(
  db: Database,
  sha256: Sha256,
  drawId: string,
  size: number,
): Promise<readonly { readonly index: number; readonly text: string; readonly path: readonly Uint8Array[] }[]> {
  const rows = await db
    .select({ index: logEvent.index, leaf: logEvent.leaf })
    .from(logEvent)
    .where(and(eq(logEvent.drawId, drawId), lt(logEvent.index, size)))
    .orderBy(asc(logEvent.index))
  const runs = rows.map(({ index }) => inclusionNodes(index, size))
  const hashes = await hashRuns(db, sha256, runs.flat())
  let at = 0
  return rows.map(({ index, leaf }, i) => {
    const path = hashes.slice(at, at + (runs[i]?.length ?? 0))
    at += path.length
    return { index, text: leafText(leaf), path }
  })
}

/** The text of a leaf: JCS is UTF-8. */
export function leafText(leaf: Uint8Array): string {
  const text = decodeUtf8(leaf)
  if (text === null) throw new Error('A leaf of the log is not text.')
  return text
}

/** The newest checkpoint that was put down, null before the first; `covering` asks for the oldest with that entry. */
export async function storedCheckpoint(
  db: Database,
  covering?: number,
): Promise<typeof logCheckpoint.$inferSelect | null> {
  const query = db.select().from(logCheckpoint)
  const [row] =
    covering === undefined
      ? await query.orderBy(desc(logCheckpoint.size)).limit(1)
      : await query
          .where(gte(logCheckpoint.size, covering + 1))
          .orderBy(asc(logCheckpoint.size))
          .limit(1)
  return row ?? null
}

/** The hashes of runs of nodes, read at once. */
async function hashRuns(db: Database, sha256: Sha256, runs: readonly LogNodeRun[]): Promise<readonly Uint8Array[]> {
  const wanted = new Map<number, Set<number>>()
  for (const { level, index } of runs.flat()) {
    const indexes = wanted.get(level) ?? new Set()
    wanted.set(level, indexes.add(index))
  }
  if (wanted.size === 0) return []
  const conditions = [...wanted].map(([level, indexes]) =>
    and(eq(logNode.level, level), inArray(logNode.index, [...indexes])),
  )
  const rows = await db
    .select()
    .from(logNode)
    .where(
      sql.join(
        conditions.map((condition) => sql`(${condition})`),
        sql` or `,
      ),
    )
  const hashes = new Map(rows.map(({ level, index, hash }) => [`${level} ${index}`, hash]))
  return runs.map((run) =>
    runHash(
      sha256,
      run.map(({ level, index }) => {
        const hash = hashes.get(`${level} ${index}`)
        if (!hash) throw new RangeError('The log has fewer entries than that.')
        return hash
      }),
    ),
  )
}
