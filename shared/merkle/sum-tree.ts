import { assertBytes, put, writeU64 } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { levelSizes, type Side } from './tree-shape.ts'

/**
 * The sum tree of the record format (PROTOCOL section 2): a Merkle tree of RFC 9162's shape whose nodes carry ticket
 * counts. Both children's counts are hashed, never just their total: with the total alone, each answer could name
 * another sibling count and every path would still check (Hu, Zhang, Guo, eprint 2018/1139).
 */

const HASH = 32

/** A sibling on the way up: its side, its tickets (1 to 2^53 − 1) and its hash (32 bytes). */
export interface PathStep {
  readonly side: Side
  readonly tickets: number
  readonly hash: Uint8Array
}

/** The hashing rules, with buffers of their own so that only the digests are allocated. */
export interface SumHasher {
  /** SHA256(0x00 || u64(tickets) || entryCommit), entryCommit being 32 bytes. */
  leaf(tickets: number, entryCommit: Uint8Array): Uint8Array
  /** SHA256(0x01 || u64(leftTickets) || leftHash || u64(rightTickets) || rightHash). */
  node(leftTickets: number, leftHash: Uint8Array, rightTickets: number, rightHash: Uint8Array): Uint8Array
}

/** Makes the two hashing rules of section 2 out of a SHA-256. */
export function createSumHasher(sha256: Sha256): SumHasher {
  const leafBytes = new Uint8Array(1 + 8 + HASH)
  const nodeBytes = new Uint8Array(1 + 2 * (8 + HASH))
  nodeBytes[0] = 1
  return {
    leaf(tickets, entryCommit) {
      writeU64(leafBytes, 1, tickets)
      put(leafBytes, 9, entryCommit)
      return sha256(leafBytes)
    },
    node(leftTickets, leftHash, rightTickets, rightHash) {
      writeU64(nodeBytes, 1, leftTickets)
      put(nodeBytes, 9, leftHash)
      writeU64(nodeBytes, 41, rightTickets)
      put(nodeBytes, 49, rightHash)
      return sha256(nodeBytes)
    },
  }
}

/** leafHash of one leaf (section 2). */
export function leafHash(sha256: Sha256, tickets: number, entryCommit: Uint8Array): Uint8Array {
  assertBytes(entryCommit, 'entryCommit', HASH)
  return createSumHasher(sha256).leaf(tickets, entryCommit)
}

/** nodeHash of two children (section 2). */
export function nodeHash(
  sha256: Sha256,
  left: { readonly tickets: number; readonly hash: Uint8Array },
  right: { readonly tickets: number; readonly hash: Uint8Array },
): Uint8Array {
  assertBytes(left.hash, 'left hash', HASH)
  assertBytes(right.hash, 'right hash', HASH)
  return createSumHasher(sha256).node(left.tickets, left.hash, right.tickets, right.hash)
}

/** A whole tree in memory: about 80 bytes a leaf. */
export interface SumTree {
  readonly size: number
  readonly root: Uint8Array
  /** All tickets: 1 to 2^53 − 1. */
  readonly total: number
  /** Siblings from leaf `index` up. Requires 0 ≤ index < size; throws a RangeError otherwise. */
  path(index: number): readonly PathStep[]
}

/**
 * Builds the tree over leaves in their order. `entryCommits` holds 32 bytes a leaf, one after the other; `tickets`
 * positive safe integers. Throws a RangeError where there is no leaf, where a count is not positive or the total
 * passes 2^53 − 1: those are refused with proper words before a list gets here.
 */
export function buildSumTree(sha256: Sha256, tickets: ArrayLike<number>, entryCommits: Uint8Array): SumTree {
  const size = tickets.length
  if (entryCommits.length !== size * HASH) throw new RangeError('each leaf needs one count and one 32-byte commitment')
  const hasher = createSumHasher(sha256)
  const sizes = levelSizes(size)
  const hashes = sizes.map((nodes) => new Uint8Array(nodes * HASH))
  const counts = sizes.map((nodes) => new Float64Array(nodes))
  const leafHashes = hashes[0] as Uint8Array
  const leafCounts = counts[0] as Float64Array
  for (let i = 0; i < size; i += 1) {
    const count = positive(tickets[i])
    leafCounts[i] = count
    leafHashes.set(hasher.leaf(count, entryCommits.subarray(i * HASH, (i + 1) * HASH)), i * HASH)
  }
  for (let level = 1; level < sizes.length; level += 1) {
    const below = hashes[level - 1] as Uint8Array
    const belowCounts = counts[level - 1] as Float64Array
    const here = hashes[level] as Uint8Array
    const hereCounts = counts[level] as Float64Array
    for (let i = 0; i < hereCounts.length; i += 1) {
      const left = belowCounts[2 * i] as number
      const leftHash = below.subarray(2 * i * HASH, (2 * i + 1) * HASH)
      const right = belowCounts[2 * i + 1]
      if (right === undefined) {
        hereCounts[i] = left
        here.set(leftHash, i * HASH)
        continue
      }
      hereCounts[i] = positive(left + right)
      const rightHash = below.subarray((2 * i + 1) * HASH, (2 * i + 2) * HASH)
      here.set(hasher.node(left, leftHash, right, rightHash), i * HASH)
    }
  }
  return {
    size,
    root: (hashes[hashes.length - 1] as Uint8Array).slice(),
    total: (counts[counts.length - 1] as Float64Array)[0] as number,
    path(index) {
      if (!Number.isInteger(index) || index < 0 || index >= size) throw new RangeError(`no leaf ${index} of ${size}`)
      const steps: PathStep[] = []
      let at = index
      for (let level = 0; level < sizes.length - 1; level += 1) {
        const sibling = at % 2 === 1 ? at - 1 : at + 1
        const count = counts[level]?.[sibling]
        if (count !== undefined) {
          const hash = (hashes[level] as Uint8Array).slice(sibling * HASH, (sibling + 1) * HASH)
          steps.push({ side: at % 2 === 1 ? 'L' : 'R', tickets: count, hash })
        }
        at = Math.floor(at / 2)
      }
      return steps
    },
  }
}

/** Root and total of leaves that pass by once, in memory that grows with the logarithm of their number. */
export interface SumTreeStream {
  /** Adds the next leaf. Throws a RangeError for a count that is not positive or a total beyond 2^53 − 1. */
  add(tickets: number, entryCommit: Uint8Array): void
  /** The tree of all leaves added so far, which stay. Throws a RangeError where there is none. */
  result(): { readonly size: number; readonly root: Uint8Array; readonly total: number }
}

/** Starts a streaming computation of root and total, for a check that need not keep the tree. */
export function streamSumTree(sha256: Sha256): SumTreeStream {
  const hasher = createSumHasher(sha256)
  // Whole subtrees, largest first: one for each 1 in the binary writing of the number of leaves.
  const tickets: number[] = []
  const hashes: Uint8Array[] = []
  let size = 0
  let total = 0
  return {
    add(held, entryCommit) {
      total = positive(total + positive(held))
      let sum = held
      let hash = hasher.leaf(held, entryCommit)
      // Each trailing 1 is a subtree as large as the one at hand: they join, as in carrying.
      for (let ones = size; ones % 2 === 1; ones = (ones - 1) / 2) {
        const left = tickets.pop() as number
        hash = hasher.node(left, hashes.pop() as Uint8Array, sum, hash)
        sum += left
      }
      tickets.push(sum)
      hashes.push(hash)
      size += 1
    },
    result() {
      if (size === 0) throw new RangeError('a tree has at least one leaf')
      let last = hashes.length - 1
      let root = hashes[last] as Uint8Array
      let sum = tickets[last] as number
      while (last > 0) {
        last -= 1
        const left = tickets[last] as number
        root = hasher.node(left, hashes[last] as Uint8Array, sum, root)
        sum += left
      }
      return { size, root, total }
    },
  }
}

function positive(count: number | undefined): number {
  if (!Number.isSafeInteger(count) || (count as number) < 1) throw new RangeError(`no such ticket count: ${count}`)
  return count as number
}
