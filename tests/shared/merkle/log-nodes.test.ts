import { expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { consistencyNodes, inclusionNodes, type LogNodeRun, rootNodes, runHash } from '#shared/merkle/log-nodes.ts'
import { buildLogTree, logLeafHash, logNodeHash } from '#shared/merkle/rfc9162.ts'

const leaves = Array.from({ length: 70 }, (_, i) => logLeafHash(sha256, Uint8Array.of(i)))
/** Only whole subtrees are stored. */
const stored = new Map<string, Uint8Array>()
leaves.forEach((hash, i) => stored.set(`0 ${i}`, hash))
for (let level = 1; 2 ** level <= leaves.length; level += 1) {
  for (let i = 0; (i + 1) * 2 ** level <= leaves.length; i += 1) {
    const [left, right] = [stored.get(`${level - 1} ${2 * i}`), stored.get(`${level - 1} ${2 * i + 1}`)]
    stored.set(`${level} ${i}`, logNodeHash(sha256, left as Uint8Array, right as Uint8Array))
  }
}
function hashOf(run: LogNodeRun): Uint8Array {
  const hashes = run.map(({ level, index }) => {
    const hash = stored.get(`${level} ${index}`)
    if (!hash) throw new Error(`node ${index} of level ${level} is not whole`)
    return hash
  })
  return runHash(sha256, hashes)
}

test('stored subtrees give the roots and proofs of the tree in memory, for every size to 70', () => {
  for (let size = 1; size <= leaves.length; size += 1) {
    const tree = buildLogTree(sha256, leaves.slice(0, size))
    expect(hashOf(rootNodes(size))).toEqual(tree.root)
    for (let index = 0; index < size; index += 1) {
      expect(inclusionNodes(index, size).map(hashOf)).toEqual(tree.inclusionProof(index))
    }
    for (let first = 1; first <= size; first += 1) {
      expect(consistencyNodes(first, size).map(hashOf), `${first} of ${size}`).toEqual(tree.consistencyProof(first))
    }
  }
})

test('a proof in a log of a million entries reads a few dozen nodes', () => {
  const size = 1_048_575
  for (const index of [0, 524_287, 700_001, size - 1]) {
    expect(inclusionNodes(index, size).flat().length).toBeLessThan(60)
    expect(consistencyNodes(index + 1, size).flat().length).toBeLessThan(60)
  }
})

test('sizes and indexes outside the log are refused', () => {
  expect(() => rootNodes(0)).toThrow(RangeError)
  expect(() => inclusionNodes(5, 5)).toThrow(RangeError)
  expect(() => inclusionNodes(-1, 5)).toThrow(RangeError)
  expect(() => consistencyNodes(0, 5)).toThrow(RangeError)
  expect(() => consistencyNodes(6, 5)).toThrow(RangeError)
})
