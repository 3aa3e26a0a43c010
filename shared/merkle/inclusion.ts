import { assertBytes, equalBytes } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { createSumHasher, type PathStep } from './sum-tree.ts'
import { siblingSides } from './tree-shape.ts'

/** Why a path does not prove its leaf. */
export type InclusionCode =
  | 'leaf-out-of-range'
  | 'tickets-out-of-range'
  | 'path-length'
  | 'path-side'
  | 'path-hash'
  | 'total-mismatch'
  | 'root-mismatch'

/** A claim that a leaf stands in a sealed list. Everything in it may come from an attacker. */
export interface InclusionClaim {
  /** Number of the leaf, from 0. */
  readonly leaf: number
  /** The leaf's tickets: 1 to 2^53 − 1 here; the format's limit for an entrant is checked where the receipt is read. */
  readonly tickets: number
  /** 32 bytes. */
  readonly entryCommit: Uint8Array
  readonly path: readonly PathStep[]
}

/** What the seal says about its list. */
export interface SealedList {
  readonly count: number
  /** 32 bytes. */
  readonly root: Uint8Array
  readonly tickets: number
}

/**
 * Verifies that a leaf with its tickets stands at its number in a sealed list (PROTOCOL section 2). The sides must be
 * exactly those that leaf i has in a tree of n leaves, every count a positive safe integer, the counts must come to
 * the sealed total and the hashes to the sealed root. Throws a TypeError where hashes are not 32 bytes.
 */
export function verifyInclusion(
  sha256: Sha256,
  claim: InclusionClaim,
  list: SealedList,
): Result<true, Failure<InclusionCode>> {
  const { leaf, tickets, path } = claim
  assertBytes(claim.entryCommit, 'entryCommit', 32)
  assertBytes(list.root, 'root', 32)
  if (!isCount(list.count) || !isCount(leaf + 1) || leaf >= list.count) {
    return fail('leaf-out-of-range', 'leaf', `The list has ${list.count} leaves, so it has no leaf ${leaf}.`)
  }
  if (!isCount(tickets)) return fail('tickets-out-of-range', 'tickets', 'The ticket count is not a whole number ≥ 1.')
  const sides = siblingSides(leaf, list.count)
  if (path.length !== sides.length) {
    const words = `Leaf ${leaf} of ${list.count} has ${sides.length} siblings on its way up, not ${path.length}.`
    return fail('path-length', 'path', words)
  }
  const hasher = createSumHasher(sha256)
  let hash = hasher.leaf(tickets, claim.entryCommit)
  let sum = tickets
  for (const [i, step] of path.entries()) {
    const at = `path[${i}]`
    if (step.side !== sides[i]) {
      return fail('path-side', `${at}.side`, `This sibling must stand on side ${sides[i]} of leaf ${leaf}.`)
    }
    if (!(step.hash instanceof Uint8Array) || step.hash.length !== 32) {
      return fail('path-hash', `${at}.hash`, 'A sibling hash is 32 bytes.')
    }
    if (!isCount(step.tickets) || !isCount(sum + step.tickets)) {
      return fail('tickets-out-of-range', `${at}.tickets`, 'The sibling ticket count is not a whole number in range.')
    }
    hash =
      step.side === 'L'
        ? hasher.node(step.tickets, step.hash, sum, hash)
        : hasher.node(sum, hash, step.tickets, step.hash)
    sum += step.tickets
  }
  if (sum !== list.tickets) {
    return fail('total-mismatch', 'path', `The path comes to ${sum} tickets, and the seal says ${list.tickets}.`)
  }
  if (!equalBytes(hash, list.root)) return fail('root-mismatch', 'path', 'The path does not lead to the sealed root.')
  return ok(true)
}

function isCount(value: number): boolean {
  return Number.isSafeInteger(value) && value >= 1
}
