import type { Sha256 } from '../bytes/hashing.ts'
import { buildSumTree, createSumHasher, streamSumTree, type PathStep } from './sum-tree.ts'

/**
 * Paths of a sum tree without the whole tree in memory: the tree's node over every run of 2^10 leaves is kept, and a path
 * is made from the leaves of one run and those nodes. Both are exactly the tree's own, since runs of 2^k leaves are nodes
 * of its level k (RFC 9162 section 2.1.1).
 */
export const BLOCK_LEAVES = 1024

/** The node over one run of leaves; its tickets are 1 to 2^53 − 1. */
export interface BlockNode {
  readonly tickets: number
  readonly hash: Uint8Array
}

/** One run of at most {@link BLOCK_LEAVES} leaves: counts, and commitments of 32 bytes one after the other. */
export interface BlockLeaves {
  readonly tickets: ArrayLike<number>
  readonly entryCommits: Uint8Array
}

/** The node over a run. Throws a RangeError where it has no leaf, or one without tickets. */
export function blockNode(sha256: Sha256, leaves: BlockLeaves): BlockNode {
  const stream = streamSumTree(sha256)
  for (let i = 0; i < leaves.tickets.length; i += 1) {
    stream.add(leaves.tickets[i] as number, leaves.entryCommits.subarray(i * 32, (i + 1) * 32))
  }
  const { root, total } = stream.result()
  return { tickets: total, hash: root }
}

/**
 * Siblings from leaf `index` of the whole list up, from the run that it stands in and the nodes over all runs. Throws a
 * RangeError where the run has no such leaf.
 */
export function blockPath(
  sha256: Sha256,
  input: { readonly index: number; readonly leaves: BlockLeaves; readonly nodes: readonly BlockNode[] },
): readonly PathStep[] {
  const { leaves, nodes } = input
  const within = buildSumTree(sha256, leaves.tickets, leaves.entryCommits).path(input.index % BLOCK_LEAVES)
  const hasher = createSumHasher(sha256)
  const steps = [...within]
  let at = Math.floor(input.index / BLOCK_LEAVES)
  for (let level = nodes; level.length > 1; at = Math.floor(at / 2)) {
    const sibling = level[at % 2 === 1 ? at - 1 : at + 1]
    if (sibling) steps.push({ side: at % 2 === 1 ? 'L' : 'R', tickets: sibling.tickets, hash: sibling.hash })
    const above: BlockNode[] = []
    for (let i = 0; i < level.length; i += 2) {
      const left = level[i] as BlockNode
      const right = level[i + 1]
      above.push(
        right
          ? {
              tickets: left.tickets + right.tickets,
              hash: hasher.node(left.tickets, left.hash, right.tickets, right.hash),
            }
          : left,
      )
    }
    level = above
  }
  return steps
}
