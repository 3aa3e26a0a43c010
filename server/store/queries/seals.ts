import { asc, eq } from 'drizzle-orm'
import type { SealView } from '#shared/schemas/api/public.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { networkOf, roundTime } from '#shared/protocol/networks.ts'
import { parseSeal } from '#shared/protocol/seal.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { formatTime } from '#shared/bytes/time.ts'
import type { Database } from '#server/store/database.ts'
import { seal } from '#server/store/schema/seal.ts'
import { instantOf } from '#server/time/instants.ts'

export type SealRow = typeof seal.$inferSelect

/** A stored seal's own words: they were checked when it was made, and the database keeps its digest true. */
export const sealOf = (row: Pick<SealRow, 'bytes'>): Seal =>
  unwrap(parseSeal(row.bytes, { allowDevelopmentChain: true }))

/** The seals of a draw, oldest first. */
export const sealsOf = (db: Database, drawId: string): Promise<SealRow[]> =>
  db.select().from(seal).where(eq(seal.drawId, drawId)).orderBy(asc(seal.id))

/** The one that no other replaces. */
export function sealInForce(rows: readonly SealRow[]): SealRow | null {
  const replaced = new Set(rows.map(({ supersedes }) => supersedes))
  return rows.find(({ digest }) => !replaced.has(digest)) ?? null
}

export function presentSeal(row: SealRow): SealView {
  const parsed = sealOf(row)
  const { beacon } = parsed.sources
  return {
    digest: row.digest,
    sealedAt: parsed.sealedAt,
    drawAt: parsed.drawAt,
    revealBy: parsed.revealBy,
    root: parsed.entries.root,
    entrants: parsed.entries.count,
    tickets: parsed.entries.tickets,
    rule: parsed.rule,
    reserves: parsed.reserves,
    prizes: parsed.prizes.map(({ id, name, quantity }) => ({ id, name, quantity })),
    beacon:
      beacon === null
        ? null
        : {
            round: beacon.round,
            at: formatTime(roundTime(beacon, beacon.round)),
            network: networkOf(beacon) ?? 'development',
            chain: beacon.chain,
          },
    seedCommit: parsed.sources.seedCommit,
    keyFingerprint: parsed.key,
    supersedes: parsed.supersedes,
    reason: parsed.reason,
    timestamp:
      row.timestampAt && row.timestampAuthority !== null
        ? { at: instantOf(row.timestampAt), authority: row.timestampAuthority }
        : null,
    changes:
      row.added !== null && row.removed !== null && row.changed !== null
        ? { added: row.added, removed: row.removed, changed: row.changed }
        : null,
  }
}
