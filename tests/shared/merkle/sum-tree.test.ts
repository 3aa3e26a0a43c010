import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { createHash } from 'node:crypto'
import { path as referencePath, root as referenceRoot, type Entry } from '#tests/reference/record.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { concatBytes, u64 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { verifyInclusion } from '#shared/merkle/inclusion.ts'
import { buildSumTree, leafHash, nodeHash, streamSumTree } from '#shared/merkle/sum-tree.ts'
import { siblingSides } from '#shared/merkle/tree-shape.ts'

/** n leaves whose counts reach over the whole range and whose commitments differ. */
function leavesOf(n: number): { tickets: number[]; commits: Uint8Array; leaves: Entry[] } {
  const tickets = Array.from({ length: n }, (_, i) => (i % 7 === 3 ? 2 ** 32 - 1 - i : 1 + ((i * i * 31) % 97)))
  const leaves = tickets.map((count, i) => ({
    tickets: count,
    entryCommit: createHash('sha256').update(`leaf ${i}`).digest(),
  }))
  return { tickets, commits: concatBytes(...leaves.map((leaf) => leaf.entryCommit)), leaves }
}

describe('the sum tree', () => {
  test('root, total and every path agree with the second implementation for all sizes to 130', () => {
    let digest: Uint8Array = new Uint8Array(32)
    for (let n = 1; n <= 130; n += 1) {
      const { tickets, commits, leaves } = leavesOf(n)
      const tree = buildSumTree(sha256, tickets, commits)
      expect(toHex(tree.root)).toBe(referenceRoot(leaves).toString('hex'))
      expect(tree.total).toBe(tickets.reduce((sum, count) => sum + count, 0))
      const stream = streamSumTree(sha256)
      tickets.forEach((count, i) => stream.add(count, commits.subarray(i * 32, i * 32 + 32)))
      expect(toHex(stream.result().root)).toBe(toHex(tree.root))
      expect(stream.result()).toMatchObject({ size: n, total: tree.total })
      for (let i = 0; i < n; i += n > 40 ? 13 : 1) {
        const path = tree.path(i)
        expect(path.map((step) => ({ ...step, hash: toHex(step.hash) }))).toEqual(referencePath(leaves, i))
        expect(path.map((step) => step.side)).toEqual(siblingSides(i, n))
        for (const step of path) digest = sha256(concatBytes(digest, u64(step.tickets), step.hash))
      }
      digest = sha256(concatBytes(digest, tree.root))
    }
    // One digest over all of it, so that no value can drift unseen; both implementations agreed on each above.
    expect(toHex(digest)).toBe('ac081301df7b5d8e88a46721d79a88b5da10054c394f0db9d7dcb0670ee73f3a')
  })

  test('a tree of one leaf is that leaf', () => {
    const { commits } = leavesOf(1)
    expect(toHex(buildSumTree(sha256, [5], commits).root)).toBe(toHex(leafHash(sha256, 5, commits)))
  })

  test.each([[0], [-1], [1.5], [Number.NaN], [2 ** 53], ['3'], [true], [null]])('a count of %s is refused', (count) => {
    const { commits } = leavesOf(1)
    expect(() => buildSumTree(sha256, [count as number], commits)).toThrow(RangeError)
    expect(() => streamSumTree(sha256).add(count as number, commits)).toThrow(RangeError)
  })

  test('no leaves, a total beyond 2^53 − 1 and commitments of another length are refused', () => {
    const { commits } = leavesOf(2)
    expect(() => buildSumTree(sha256, [], new Uint8Array(0))).toThrow(RangeError)
    expect(() => streamSumTree(sha256).result()).toThrow(RangeError)
    expect(() => buildSumTree(sha256, [2 ** 53 - 1, 1], commits)).toThrow(RangeError)
    expect(() => buildSumTree(sha256, [1], commits)).toThrow(RangeError)
    expect(() => leafHash(sha256, 1, new Uint8Array(31))).toThrow(TypeError)
  })
})

describe('an inclusion path', () => {
  const { tickets, commits } = leavesOf(11)
  const tree = buildSumTree(sha256, tickets, commits)
  const list = { count: 11, root: tree.root, tickets: tree.total }
  const claim = (leaf: number) => ({
    leaf,
    tickets: tickets[leaf] as number,
    entryCommit: commits.slice(leaf * 32, leaf * 32 + 32),
    path: tree.path(leaf),
  })
  const code = (c: ReturnType<typeof claim>, l = list): string => {
    const result = verifyInclusion(sha256, c, l)
    return result.ok ? 'ok' : result.error.code
  }

  test('verifies for its own leaf and for no other number', () => {
    for (let leaf = 0; leaf < 11; leaf += 1) {
      expect(code(claim(leaf))).toBe('ok')
      for (const other of [-1, 0, 1, 5, 10, 11, 0.5, Number.NaN, 2 ** 60]) {
        if (other !== leaf) expect(code({ ...claim(leaf), leaf: other })).not.toBe('ok')
      }
    }
  })

  test('fails for any one change', () => {
    fc.assert(
      fc.property(fc.nat(10), fc.nat(3), fc.nat(31), fc.nat(3), (leaf, at, byte, what) => {
        const good = claim(leaf)
        const i = at % good.path.length
        const step = good.path[i] as (typeof good.path)[number]
        const hash = step.hash.slice()
        hash[byte] = (hash[byte] as number) ^ 1
        const changed = [
          { ...step, hash },
          { ...step, tickets: step.tickets + 1 },
          { ...step, side: step.side === 'L' ? ('R' as const) : ('L' as const) },
          { ...step, tickets: 0 },
        ][what] as typeof step
        expect(code({ ...good, path: good.path.map((s, j) => (j === i ? changed : s)) })).not.toBe('ok')
      }),
      { seed: 2 },
    )
    const good = claim(4)
    expect(code({ ...good, tickets: good.tickets + 1 })).toBe('total-mismatch')
    expect(code({ ...good, tickets: 0 })).toBe('tickets-out-of-range')
    expect(code({ ...good, entryCommit: claim(5).entryCommit })).toBe('root-mismatch')
    expect(code({ ...good, path: good.path.slice(1) })).toBe('path-length')
    expect(code({ ...good, path: [...good.path, ...good.path] })).toBe('path-length')
    expect(code(good, { ...list, tickets: list.tickets + 1 })).toBe('total-mismatch')
    expect(code(claim(10), { ...list, count: 12 })).toBe('path-length')
    expect(code(good, { ...list, count: 0 })).toBe('leaf-out-of-range')
  })

  test.each([[0], [-1], [1.5], [Number.NaN], [2 ** 53], ['3'], [true]])('a sibling count of %s is refused', (count) => {
    const good = claim(0)
    const path = good.path.map((step, i) => (i === 1 ? { ...step, tickets: count as number } : step))
    expect(code({ ...good, path })).toBe('tickets-out-of-range')
  })

  test.each([['text'], [new Uint8Array(31)], [null]])('a sibling hash of %s is refused', (hash) => {
    const good = claim(0)
    const path = good.path.map((step) => ({ ...step, hash: hash as Uint8Array }))
    expect(code({ ...good, path })).toBe('path-hash')
  })

  test('the same counts moved from one side to the other do not verify', () => {
    // Two leaves of 3 and 4 tickets, and a claim that they hold 4 and 3.
    const swapped = buildSumTree(sha256, [3, 4], commits.slice(0, 64))
    const path = swapped.path(0).map((step) => ({ ...step, tickets: 3 }))
    const wrong = { leaf: 0, tickets: 4, entryCommit: commits.slice(0, 32), path }
    expect(code(wrong, { count: 2, root: swapped.root, tickets: 7 })).toBe('root-mismatch')
  })
})

/**
 * Why both children's counts are hashed: Hu, Zhang and Guo, "Breaking the Binding", eprint 2018/1139. The flawed tree
 * hashes only the total, H(left + right || leftHash || rightHash), so each holder can be shown another sibling count.
 */
describe('the flaw of trees that hash only the total', () => {
  interface Flaw {
    numeric_example: { leaves: [number, number]; claimed_total: number }
  }
  const flaw = JSON.parse(readFileSync(join(import.meta.dirname, '../../outside/merkle_sum_flaw.json'), 'utf8')) as Flaw
  const [five, seven] = flaw.numeric_example.leaves
  const claimed = flaw.numeric_example.claimed_total
  const commits = leavesOf(2).commits
  const hashes = [leafHash(sha256, five, commits.slice(0, 32)), leafHash(sha256, seven, commits.slice(32))] as const
  const flawedNode = (left: number, right: number): string => toHex(sha256(concatBytes(u64(left + right), ...hashes)))

  test('a published total of 7 passes for both holders of 5 and 7 in the flawed tree', () => {
    const root = flawedNode(claimed, 0)
    expect(flawedNode(five, 2)).toBe(root)
    expect(flawedNode(0, seven)).toBe(root)
  })

  test('ours refuses it whatever root is published for that total', () => {
    const claims = [
      { leaf: 0, tickets: five, entryCommit: commits.slice(0, 32), path: [{ side: 'R', tickets: 2, hash: hashes[1] }] },
      { leaf: 1, tickets: seven, entryCommit: commits.slice(32), path: [{ side: 'L', tickets: 0, hash: hashes[0] }] },
    ] as const
    for (const [left, right] of [
      [5, 2],
      [0, 7],
      [7, 0],
      [5, 7],
    ] as const) {
      const root = nodeHash(sha256, { tickets: left, hash: hashes[0] }, { tickets: right, hash: hashes[1] })
      const list = { count: 2, root, tickets: claimed }
      expect(claims.map((claim) => verifyInclusion(sha256, claim, list).ok).every(Boolean)).toBe(false)
    }
  })
})
