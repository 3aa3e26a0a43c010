import { and, asc, eq, gt } from 'drizzle-orm'
import type { Database } from '#server/store/database.ts'
import { sealedLeaf } from '#server/store/schema/seal.ts'
import type { SealRow } from './seals.ts'

const PAGE = 50_000

/** The leaves of a sealed list, packed: a million of them fit in memory. Commitments have 32 bytes a leaf. */
export interface SealedLeaves {
  readonly tickets: Float64Array
  readonly entryCommits: Uint8Array
  readonly commitmentsOf: (leaf: number) => { readonly labelCommit: Uint8Array; readonly identityCommit: Uint8Array }
}

/** Reads the whole sealed list, leaf by leaf. */
export async function readSealedLeaves(db: Database, seal: Pick<SealRow, 'id' | 'entrants'>): Promise<SealedLeaves> {
  const tickets = new Float64Array(seal.entrants)
  const entryCommits = new Uint8Array(seal.entrants * 32)
  const labelCommits = new Uint8Array(seal.entrants * 32)
  const identityCommits = new Uint8Array(seal.entrants * 32)
  let read = 0
  while (read < seal.entrants) {
    const rows = await db
      .select()
      .from(sealedLeaf)
      .where(and(eq(sealedLeaf.sealId, seal.id), gt(sealedLeaf.leaf, read - 1)))
      .orderBy(asc(sealedLeaf.leaf))
      .limit(PAGE)
    if (rows.length === 0) throw new Error('The sealed list is not whole.')
    for (const row of rows) {
      if (row.leaf !== read) throw new Error('The sealed list is not whole.')
      tickets[read] = row.tickets
      entryCommits.set(row.entryCommit, read * 32)
      labelCommits.set(row.labelCommit, read * 32)
      identityCommits.set(row.identityCommit, read * 32)
      read += 1
    }
  }
  return {
    tickets,
    entryCommits,
    commitmentsOf: (leaf) => ({
      labelCommit: labelCommits.subarray(leaf * 32, (leaf + 1) * 32),
      identityCommit: identityCommits.subarray(leaf * 32, (leaf + 1) * 32),
    }),
  }
}
