import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { BLOCK_LEAVES, blockNode, blockPath, type BlockLeaves } from '#shared/merkle/sum-blocks.ts'
import { verifyInclusion } from '#shared/merkle/inclusion.ts'
import { buildSumTree } from '#shared/merkle/sum-tree.ts'

const sha256 = (bytes: Uint8Array) => new Uint8Array(createHash('sha256').update(bytes).digest())

function listOf(size: number): { tickets: number[]; commits: Uint8Array } {
  const tickets = Array.from({ length: size }, (_, i) => 1 + ((i * 7919) % 13))
  const commits = new Uint8Array(size * 32)
  for (let i = 0; i < size; i += 1) commits.set(sha256(Buffer.from(`entry ${i}`)), i * 32)
  return { tickets, commits }
}

function blocksOf({ tickets, commits }: { tickets: number[]; commits: Uint8Array }): BlockLeaves[] {
  const blocks: BlockLeaves[] = []
  for (let from = 0; from < tickets.length; from += BLOCK_LEAVES) {
    const to = from + BLOCK_LEAVES
    blocks.push({ tickets: tickets.slice(from, to), entryCommits: commits.subarray(from * 32, to * 32) })
  }
  return blocks
}

describe('paths by runs of leaves', () => {
  // Around whole runs, and with odd nodes carried up both inside the last run and above the runs.
  it.each([1, 2, 5, 1023, 1024, 1025, 2048, 2049, 3073, 5121, 7000])(
    'are those of the whole tree of %i leaves',
    (size) => {
      const list = listOf(size)
      const tree = buildSumTree(sha256, list.tickets, list.commits)
      const blocks = blocksOf(list)
      const nodes = blocks.map((leaves) => blockNode(sha256, leaves))
      for (const index of new Set([0, 1, 1023, 1024, 1025, 2047, 2048, size >> 1, size - 2, size - 1])) {
        if (index < 0 || index >= size) continue
        const leaves = blocks[Math.floor(index / BLOCK_LEAVES)] as BlockLeaves
        const path = blockPath(sha256, { index, leaves, nodes })
        expect(path).toEqual(tree.path(index))
        const entryCommit = list.commits.subarray(index * 32, (index + 1) * 32)
        const claim = { leaf: index, tickets: list.tickets[index] as number, entryCommit, path }
        expect(verifyInclusion(sha256, claim, { count: size, root: tree.root, tickets: tree.total }).ok).toBe(true)
      }
    },
  )

  it('know no leaf beyond the end of the last run', () => {
    const list = listOf(1030)
    const blocks = blocksOf(list)
    const nodes = blocks.map((leaves) => blockNode(sha256, leaves))
    expect(() => blockPath(sha256, { index: 1030, leaves: blocks[1] as BlockLeaves, nodes })).toThrow(RangeError)
  })
})
