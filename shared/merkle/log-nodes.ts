import type { Sha256 } from '#shared/bytes/hashing.ts'
import { logNodeHash } from '#shared/merkle/rfc9162.ts'

/**
 * Proofs out of stored nodes: which whole subtrees of a log make up a root or a proof, so that a store which holds them
 * needs to read only a few for any size (RFC 9162 sections 2.1.1, 2.1.3 and 2.1.4).
 */

/** A whole subtree: node `index` of `level` stands over the leaves index·2^level to (index + 1)·2^level − 1. */
export interface LogNodeId {
  readonly level: number
  readonly index: number
}

/** A hash made of whole subtrees, from left to right: the last two are hashed together first. Never empty. */
export type LogNodeRun = readonly LogNodeId[]

/** What makes up the root of the first `size` leaves. Requires size ≥ 1; throws a RangeError otherwise. */
export function rootNodes(size: number): LogNodeRun {
  requireSize(size)
  return run(0, size)
}

/** What makes up each sibling of leaf `index` in a tree of `size`, from the leaf up. Requires 0 ≤ index < size. */
export function inclusionNodes(index: number, size: number): readonly LogNodeRun[] {
  requireSize(size)
  if (!Number.isSafeInteger(index) || index < 0 || index >= size) throw new RangeError(`no leaf ${index} of ${size}`)
  const path: LogNodeRun[] = []
  let start = 0
  let end = size
  while (end - start > 1) {
    const split = start + largestPowerBelow(end - start)
    if (index < split) {
      path.push(run(split, end))
      end = split
    } else {
      path.push(run(start, split))
      start = split
    }
  }
  return path.reverse()
}

/** What makes up the proof that `first` leaves are the beginning of `second`. Requires 1 ≤ first ≤ second. */
export function consistencyNodes(first: number, second: number): readonly LogNodeRun[] {
  requireSize(second)
  if (!Number.isSafeInteger(first) || first < 1 || first > second) {
    throw new RangeError(`no tree of ${first} in ${second}`)
  }
  const proof: LogNodeRun[] = []
  let start = 0
  let end = second
  // Whether what is left of the older tree is its whole, whose root the asker has already.
  let whole = true
  while (first !== end) {
    const split = start + largestPowerBelow(end - start)
    if (first <= split) {
      proof.push(run(split, end))
      end = split
    } else {
      proof.push(run(start, split))
      start = split
      whole = false
    }
  }
  if (!whole) proof.push(run(start, end))
  return proof.reverse()
}

/** The hash of a run, its nodes' hashes in their order. */
export function runHash(sha256: Sha256, hashes: readonly Uint8Array[]): Uint8Array {
  return hashes.reduceRight((right, left) => logNodeHash(sha256, left, right))
}

/** The leaves [start, end): whole subtrees, largest first, where start is a multiple of the largest. */
function run(start: number, end: number): LogNodeRun {
  const nodes: LogNodeId[] = []
  for (let at = start; at < end; ) {
    let level = 0
    let leaves = 1
    while (at + leaves * 2 <= end) {
      leaves *= 2
      level += 1
    }
    nodes.push({ level, index: at / leaves })
    at += leaves
  }
  return nodes
}

function largestPowerBelow(n: number): number {
  let k = 1
  while (k * 2 < n) k *= 2
  return k
}

function requireSize(size: number): void {
  if (!Number.isSafeInteger(size) || size < 1) throw new RangeError(`no log has ${size} leaves`)
}
