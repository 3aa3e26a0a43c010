import { assertBytes, concatBytes, equalBytes } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { siblingSides } from './tree-shape.ts'

/** Plain Merkle trees as RFC 9162 sections 2.1.1 to 2.1.4 define them, for the site's log. */

const LEAF = Uint8Array.of(0)
const NODE = Uint8Array.of(1)

/** Hash of a log leaf's data (RFC 9162 section 2.1.1). */
export function logLeafHash(sha256: Sha256, data: Uint8Array): Uint8Array {
  return sha256(concatBytes(LEAF, data))
}

/** Hash of two neighbouring subtrees (RFC 9162 section 2.1.1). */
export function logNodeHash(sha256: Sha256, left: Uint8Array, right: Uint8Array): Uint8Array {
  return sha256(concatBytes(NODE, left, right))
}

/** A log tree whose levels are all in memory. */
export interface LogTree {
  readonly size: number
  readonly root: Uint8Array
  /** Siblings from leaf `index` up (section 2.1.3). Throws a RangeError for an index outside the tree. */
  inclusionProof(index: number): readonly Uint8Array[]
  /** Proof that the first `size` leaves are a prefix (section 2.1.4). Requires 1 ≤ size ≤ the tree's size. */
  consistencyProof(size: number): readonly Uint8Array[]
}

/** Builds the tree over leaf hashes in order. No leaves give the hash of nothing. */
export function buildLogTree(sha256: Sha256, leafHashes: readonly Uint8Array[]): LogTree {
  const size = leafHashes.length
  const levels: (readonly Uint8Array[])[] = [leafHashes]
  for (let level = leafHashes; level.length > 1; ) {
    const next: Uint8Array[] = []
    for (let i = 0; i < level.length; i += 2) {
      const left = level[i] as Uint8Array
      const right = level[i + 1]
      next.push(right === undefined ? left : logNodeHash(sha256, left, right))
    }
    levels.push(next)
    level = next
  }
  const root = levels.at(-1)?.[0] ?? sha256(new Uint8Array(0))

  /** Root of leaves [start, end), which is one stored node or a split (section 2.1.1). */
  function range(start: number, end: number): Uint8Array {
    const length = end - start
    const level = Math.ceil(Math.log2(length))
    const index = start / 2 ** level
    if (Number.isInteger(index) && (length === 2 ** level || end === size)) {
      return levels[level]?.[index] as Uint8Array
    }
    const split = start + largestPowerBelow(length)
    return logNodeHash(sha256, range(start, split), range(split, end))
  }

  function subproof(m: number, start: number, end: number, complete: boolean): Uint8Array[] {
    const length = end - start
    if (m === length) return complete ? [] : [range(start, end)]
    const k = largestPowerBelow(length)
    if (m <= k) return [...subproof(m, start, start + k, complete), range(start + k, end)]
    return [...subproof(m - k, start + k, end, false), range(start, start + k)]
  }

  return {
    size,
    root,
    inclusionProof(index) {
      if (!Number.isInteger(index) || index < 0 || index >= size) throw new RangeError(`no leaf ${index} of ${size}`)
      const proof: Uint8Array[] = []
      let at = index
      for (const level of levels) {
        const sibling = level[at % 2 === 1 ? at - 1 : at + 1]
        if (sibling !== undefined) proof.push(sibling)
        at = Math.floor(at / 2)
      }
      return proof
    },
    consistencyProof(first) {
      if (!Number.isInteger(first) || first < 1 || first > size) throw new RangeError(`no tree of ${first} in ${size}`)
      return subproof(first, 0, size, true)
    },
  }
}

/** Whether `proof` leads from a leaf hash at `index` to the root of a tree of `size` leaves (section 2.1.3.2). */
export function verifyLogInclusion(
  sha256: Sha256,
  claim: {
    readonly index: number
    readonly size: number
    readonly leafHash: Uint8Array
    readonly proof: readonly Uint8Array[]
    readonly root: Uint8Array
  },
): boolean {
  const { index, size, leafHash, proof, root } = claim
  if (!Number.isSafeInteger(size) || size < 1 || !Number.isSafeInteger(index) || index < 0 || index >= size)
    return false
  if (![leafHash, root, ...proof].every(isHash)) return false
  const sides = siblingSides(index, size)
  if (sides.length !== proof.length) return false
  let hash = leafHash
  for (const [i, sibling] of proof.entries()) {
    hash = sides[i] === 'L' ? logNodeHash(sha256, sibling, hash) : logNodeHash(sha256, hash, sibling)
  }
  return equalBytes(hash, root)
}

/** Whether `proof` shows the tree of `first` leaves to be a prefix of that of `second` (section 2.1.4.2). */
export function verifyLogConsistency(
  sha256: Sha256,
  claim: {
    readonly first: number
    readonly second: number
    readonly firstRoot: Uint8Array
    readonly secondRoot: Uint8Array
    readonly proof: readonly Uint8Array[]
  },
): boolean {
  const { first, second, firstRoot, secondRoot, proof } = claim
  if (!Number.isSafeInteger(first) || !Number.isSafeInteger(second) || first < 1 || second < first) return false
  if (first === second) return proof.length === 0 && equalBytes(firstRoot, secondRoot)
  if (![firstRoot, secondRoot, ...proof].every(isHash)) return false
  // The old tree's root is not sent where the old tree is one whole subtree of the new one.
  const nodes = isPower(first) ? [firstRoot, ...proof] : [...proof]
  const start = nodes.shift()
  if (start === undefined) return false
  let fn = first - 1
  let sn = second - 1
  while (fn % 2 === 1) {
    fn = Math.floor(fn / 2)
    sn = Math.floor(sn / 2)
  }
  let fr = start
  let sr = start
  for (const node of nodes) {
    if (sn === 0) return false
    if (fn % 2 === 1 || fn === sn) {
      fr = logNodeHash(sha256, node, fr)
      sr = logNodeHash(sha256, node, sr)
      while (fn % 2 === 0 && fn !== 0) {
        fn = Math.floor(fn / 2)
        sn = Math.floor(sn / 2)
      }
    } else sr = logNodeHash(sha256, sr, node)
    fn = Math.floor(fn / 2)
    sn = Math.floor(sn / 2)
  }
  return sn === 0 && equalBytes(fr, firstRoot) && equalBytes(sr, secondRoot)
}

function largestPowerBelow(n: number): number {
  let k = 1
  while (k * 2 < n) k *= 2
  return k
}

function isPower(n: number): boolean {
  return largestPowerBelow(n) * 2 === n || n === 1
}

function isHash(value: unknown): value is Uint8Array {
  assertBytes(value, 'hash')
  return value.length === 32
}
