import { and, asc, between, eq } from 'drizzle-orm'
import { toHex } from '#shared/bytes/hex.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { BLOCK_LEAVES, blockNode, blockPath, type BlockLeaves, type BlockNode } from '#shared/merkle/sum-blocks.ts'
import type { Inclusion } from '#shared/protocol/receipt.ts'
import { FORMAT } from '#shared/protocol/limits.ts'
import type { Database } from '#server/store/database.ts'
import { seal, sealedLeaf } from '#server/store/schema/seal.ts'
import { Lasting } from './lasting.ts'

/** Nodes of so many sealed lists are kept: at most 2,000 of them each. */
const blocks = new Lasting<readonly BlockNode[]>(100)

/** The short proof of a leaf; null where there is no such seal or leaf. A million leaves are read once for each process. */
export async function inclusionOf(
  { db, sha256 }: { readonly db: Database; readonly sha256: Sha256 },
  input: { readonly seal: string; readonly leaf: number },
): Promise<Inclusion | null> {
  const [row] = await db.select().from(seal).where(eq(seal.digest, input.seal))
  if (!row || input.leaf >= row.entrants) return null
  const nodes = await blocks.get(row.digest, () => nodesOf(db, sha256, row.id, row.entrants))
  const from = Math.floor(input.leaf / BLOCK_LEAVES) * BLOCK_LEAVES
  const leaves = await leavesOf(db, row.id, from)
  const at = input.leaf - from
  const path = blockPath(sha256, { index: input.leaf, leaves, nodes })
  return {
    format: FORMAT,
    kind: 'inclusion',
    seal: row.digest,
    leaf: input.leaf,
    tickets: leaves.tickets[at] as number,
    entryCommit: toHex(leaves.entryCommits.subarray(at * 32, (at + 1) * 32)),
    path: path.map(({ hash, side, tickets }) => ({ hash: toHex(hash), side, tickets })),
  }
}

async function nodesOf(db: Database, sha256: Sha256, sealId: number, entrants: number): Promise<BlockNode[]> {
  const nodes: BlockNode[] = []
  // A look-up for each run: between them other requests are answered.
  for (let from = 0; from < entrants; from += BLOCK_LEAVES)
    nodes.push(blockNode(sha256, await leavesOf(db, sealId, from)))
  return nodes
}

async function leavesOf(db: Database, sealId: number, from: number): Promise<BlockLeaves> {
  const rows = await db
    .select({ tickets: sealedLeaf.tickets, entryCommit: sealedLeaf.entryCommit })
    .from(sealedLeaf)
    .where(and(eq(sealedLeaf.sealId, sealId), between(sealedLeaf.leaf, from, from + BLOCK_LEAVES - 1)))
    .orderBy(asc(sealedLeaf.leaf))
  const entryCommits = new Uint8Array(rows.length * 32)
  rows.forEach(({ entryCommit }, i) => entryCommits.set(entryCommit, i * 32))
  return { tickets: rows.map(({ tickets }) => tickets), entryCommits }
}
