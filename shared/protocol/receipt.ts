import { canonicalBytes, parseCanonicalJson, type CanonicalJsonCode } from '../bytes/canonical-json.ts'
import { hexBytes, toHex } from '../bytes/hex.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { fail, type Failure, type Result } from '../bytes/result.ts'
import { verifyInclusion, type InclusionCode } from '../merkle/inclusion.ts'
import type { PathStep } from '../merkle/sum-tree.ts'
import type { Side } from '../merkle/tree-shape.ts'
import { commitEntrant, readIdentity, type Identity } from './commitments.ts'
import { FORMAT, MAX_ENTRANTS, MAX_TICKETS, MAX_TICKETS_EACH } from './limits.ts'
import type { Seal } from './seal-types.ts'
import { hex, list, members, oneOf, place, readShape, refuse, text, whole, type ShapeCode } from './shape.ts'

/** A sibling as written in a receipt; `hash` in hex. */
export interface ReceiptStep {
  readonly hash: string
  readonly side: Side
  readonly tickets: number
}

interface Proof {
  readonly format: 'evenpenny/1'
  /** sealDigest, in hex. */
  readonly seal: string
  readonly leaf: number
  readonly tickets: number
  readonly path: readonly ReceiptStep[]
}

/** A receipt: private to one entrant, before and after the draw (PROTOCOL section 10). */
export interface Receipt extends Proof {
  readonly kind: 'receipt'
  readonly label: string
  readonly labelSalt: string
  readonly identity: Identity
  readonly identitySalt: string
}

/** The short proof, which names nobody and can be shown in public (section 10). */
export interface Inclusion extends Proof {
  readonly kind: 'inclusion'
  readonly entryCommit: string
}

/** Why a receipt or short proof is not one. */
export type ReceiptShapeCode = ShapeCode | CanonicalJsonCode
/** Why it does not belong to a seal. */
export type ReceiptCode = 'seal-mismatch' | InclusionCode

/** What a receipt is made of; salts and digest 32 bytes each. */
export interface ReceiptInput {
  readonly sealDigest: Uint8Array
  readonly leaf: number
  readonly tickets: number
  readonly label: string
  readonly labelSalt: Uint8Array
  readonly identity: Identity
  readonly identitySalt: Uint8Array
  readonly path: readonly PathStep[]
}

/** Makes a receipt. Nothing is checked here: `checkReceipt` is for whoever gets one. */
export function makeReceipt(input: ReceiptInput): Receipt {
  const { contact, name, numbers, reference } = input.identity
  return {
    format: FORMAT,
    kind: 'receipt',
    seal: toHex(input.sealDigest),
    leaf: input.leaf,
    tickets: input.tickets,
    label: input.label,
    labelSalt: toHex(input.labelSalt),
    identity: { contact, name, numbers, reference },
    identitySalt: toHex(input.identitySalt),
    path: input.path.map(({ hash, side, tickets }) => ({ hash: toHex(hash), side, tickets })),
  }
}

/** The short proof of a receipt: the same leaf and path, with the commitment in place of all that it hides. */
export function shortProof(sha256: Sha256, receipt: Receipt): Inclusion {
  const { format, seal, leaf, tickets, path } = receipt
  return { format, kind: 'inclusion', seal, leaf, tickets, entryCommit: toHex(entryCommitOf(sha256, receipt)), path }
}

/** The bytes of a receipt or short proof: JCS. */
export function receiptBytes(receipt: Receipt | Inclusion): Uint8Array {
  return canonicalBytes(receipt)
}

/** Parses a receipt or short proof, told apart by `kind`: canonical bytes, exactly its members, values in range. */
export function parseReceipt(bytes: Uint8Array): Result<Receipt | Inclusion, Failure<ReceiptShapeCode>> {
  const json = parseCanonicalJson(bytes)
  return json.ok ? readShape(() => readReceipt(json.value)) : json
}

/**
 * Checks that a receipt or short proof leads to a seal's root and total (section 10): its digest, its commitment, and
 * its path with exactly the sides of its number. `digest` is the seal's, in hex.
 */
export function checkReceipt(
  sha256: Sha256,
  receipt: Receipt | Inclusion,
  seal: Pick<Seal, 'entries'>,
  digest: string,
): Result<true, Failure<ReceiptCode>> {
  if (receipt.seal !== digest) return fail('seal-mismatch', 'seal', 'This receipt belongs to another seal.')
  const entryCommit = receipt.kind === 'inclusion' ? hexBytes(receipt.entryCommit, 32) : entryCommitOf(sha256, receipt)
  const path = receipt.path.map(({ hash, side, tickets }) => ({ hash: hexBytes(hash, 32), side, tickets }))
  const { count, root, tickets } = seal.entries
  return verifyInclusion(
    sha256,
    { leaf: receipt.leaf, tickets: receipt.tickets, entryCommit, path },
    { count, root: hexBytes(root, 32), tickets },
  )
}

function entryCommitOf(sha256: Sha256, receipt: Receipt): Uint8Array {
  const salts = { labelSalt: hexBytes(receipt.labelSalt, 32), identitySalt: hexBytes(receipt.identitySalt, 32) }
  return commitEntrant(sha256, salts, receipt.label, receipt.identity).entryCommit
}

const PROOF = ['format', 'kind', 'seal', 'leaf', 'tickets', 'path'] as const

function readReceipt(value: unknown): Receipt | Inclusion {
  if (typeof value === 'object' && value !== null && 'kind' in value && value.kind === 'inclusion') {
    const m = members(value, [...PROOF, 'entryCommit'], '')
    return { ...readProof(m), kind: 'inclusion', entryCommit: hex(m.entryCommit, 32, 'entryCommit') }
  }
  const m = members(value, [...PROOF, 'label', 'labelSalt', 'identity', 'identitySalt'], '')
  return {
    ...readProof(m),
    kind: oneOf(m.kind, ['receipt'], 'kind'),
    label: text(m.label, 'label'),
    labelSalt: hex(m.labelSalt, 32, 'labelSalt'),
    identity: readIdentity(m.identity, 'identity'),
    identitySalt: hex(m.identitySalt, 32, 'identitySalt'),
  }
}

function readProof(m: Readonly<Record<(typeof PROOF)[number], unknown>>): Proof {
  return {
    format: oneOf(m.format, [FORMAT], 'format'),
    seal: hex(m.seal, 32, 'seal'),
    leaf: whole(m.leaf, 0, MAX_ENTRANTS - 1, 'leaf'),
    tickets: whole(m.tickets, 1, MAX_TICKETS_EACH, 'tickets'),
    path: readPath(m.path, 'path'),
  }
}

/** Reads a path strictly; throws inside `readShape`. A tree of 2,000,000 leaves is 21 levels deep. */
export function readPath(value: unknown, at: string): readonly ReceiptStep[] {
  const steps = list(value, at)
  if (steps.length > 21) refuse('value-wrong', at, 'No path is that long.')
  return steps.map((step, i) => {
    const here = `${at}[${i}]`
    const m = members(step, ['hash', 'side', 'tickets'], here)
    return {
      hash: hex(m.hash, 32, place(here, 'hash')),
      side: oneOf(m.side, ['L', 'R'], place(here, 'side')),
      tickets: whole(m.tickets, 1, MAX_TICKETS, place(here, 'tickets')),
    }
  })
}
