import { randomBytes } from 'node:crypto'
import { createSha256 } from '#server/adapters/archive/check-tools.ts'
import type { CheckFiles } from '#server/adapters/archive/check-files.ts'
import { deflateWithZlib } from '#server/adapters/archive/zlib-codec.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { CHECKING_TEXT } from '#shared/archive/checking-text.ts'
import { lockedMembers, proofMember, publicMembers, sumMember } from '#shared/archive/proof-archive.ts'
import { writeZip } from '#shared/archive/zip-writer.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { formatTime } from '#shared/bytes/time.ts'
import type { EntrantRow } from '#shared/entrants/entrant-csv.ts'
import {
  commitEntrant,
  createSaltDeriver,
  type Identity,
  referenceFromEntropy,
  type Salts,
} from '#shared/protocol/commitments.ts'
import { signDevelopmentRound } from '#shared/protocol/development-chain.ts'
import { prepareEntries, type PreparedEntries, type SealEntrant } from '#shared/protocol/entrants.ts'
import { writeEntries } from '#shared/protocol/entries-csv.ts'
import { labelsBytes } from '#shared/protocol/labels.ts'
import { FORMAT, MIN_SEAL_LEAD } from '#shared/protocol/limits.ts'
import { beaconFor, DEVELOPMENT_CHAIN } from '#shared/protocol/networks.ts'
import { makeReceipt, type Receipt } from '#shared/protocol/receipt.ts'
import { resultBytes } from '#shared/protocol/result.ts'
import { sealBytes, seedCommitment, validateSeal } from '#shared/protocol/seal.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { type SettledDraw, settleDraw, winningLeaves } from '#shared/protocol/settle.ts'
import { encodePem, keyFingerprint, publicKeyOf, signBytes } from '#shared/protocol/signature.ts'
import type { WalkRule } from '#shared/sampling/walk.ts'

/** Bytes of entropy, as many as asked for. */
export type Entropy = (length: number) => Uint8Array

/** Node's own entropy. */
export const machineEntropy: Entropy = (length) => new Uint8Array(randomBytes(length))

const REFERENCE_LENGTH = 16
const TERMS = 'This is a rehearsal. No ticket was sold for it, and no prize is given.\n'

/** A row as an entrant of a seal: everything known about them, with a new random reference. */
export function sealEntrant(row: EntrantRow, entropy: Entropy): SealEntrant {
  const contact = [row.email, row.phone].filter((text) => text !== '').join(', ')
  const reference = referenceFromEntropy(entropy(REFERENCE_LENGTH))
  return {
    label: row.label,
    tickets: row.tickets,
    identity: { contact, name: row.name, numbers: row.numbers, reference },
  }
}

/** Entropy taken from the machine in large helpings: a million small ones take seconds. */
export function bufferedEntropy(entropy: Entropy, helping = 65_536): Entropy {
  let stock = new Uint8Array(0) as Uint8Array
  return (length) => {
    if (stock.length < length) stock = entropy(Math.max(helping, length))
    const taken = stock.slice(0, length)
    stock = stock.subarray(length)
    return taken
  }
}

export interface SealedRehearsal {
  readonly entrants: readonly SealEntrant[]
  readonly prepared: PreparedEntries
  readonly blindingKey: Uint8Array
  readonly seed: Uint8Array
  readonly secretKey: Uint8Array
  readonly seal: Seal
  readonly sealBytes: Uint8Array
  readonly sealDigest: Uint8Array
}

/** Commitments and tree of a list (PROTOCOL sections 1 and 2). Throws with plain words where the list is refused. */
export function prepareList(entrants: readonly SealEntrant[], blindingKey: Uint8Array): PreparedEntries {
  return unwrap(prepareEntries(sha256, blindingKey, entrants))
}

/**
 * Seals a rehearsal. `now`, in seconds since 1970, is the time of the draw's beacon round or a little later: the seal is
 * dated back by the two minutes that must lie between seal and draw, so that nobody has to wait for them. That is no
 * deceit, because the title says what it is, and the development chain's rounds can be made at any time.
 */
export function sealRehearsal(
  input: {
    readonly entrants: readonly SealEntrant[]
    readonly prepared: PreparedEntries
    readonly blindingKey: Uint8Array
    readonly prizes: readonly number[]
    readonly reserves: number
    readonly rule: WalkRule
  },
  now: number,
  entropy: Entropy,
): SealedRehearsal {
  const { entrants, prepared, blindingKey, prizes, reserves, rule } = input
  const seed = entropy(32)
  const secretKey = entropy(32)
  // A whole period before now, so that the first round at or after it is not in the future.
  const drawAt = Math.floor(now) - DEVELOPMENT_CHAIN.period
  const seal = unwrap(
    validateSeal(
      {
        format: FORMAT,
        kind: 'seal',
        draw: 'rehearsal',
        organisation: { name: 'Rehearsal', registration: null },
        title: 'Rehearsal, not a draw',
        key: keyFingerprint(sha256, publicKeyOf(secretKey)),
        terms: toHex(sha256(utf8(TERMS))),
        sealedAt: formatTime(drawAt - MIN_SEAL_LEAD),
        drawAt: formatTime(drawAt),
        revealBy: null,
        entries: { count: entrants.length, root: toHex(prepared.tree.root), tickets: prepared.tree.total },
        prizes: prizes.map((quantity, i) => ({ id: `prize-${i + 1}`, name: `Prize ${i + 1}`, quantity })),
        reserves,
        rule,
        sources: {
          beacon: beaconFor(DEVELOPMENT_CHAIN, drawAt),
          flips: 'derived',
          seedCommit: toHex(seedCommitment(sha256, seed)),
          tosses: null,
        },
        supersedes: null,
        reason: null,
      },
      { allowDevelopmentChain: true },
    ),
  )
  const bytes = sealBytes(seal)
  return { entrants, prepared, blindingKey, seed, secretKey, seal, sealBytes: bytes, sealDigest: sha256(bytes) }
}

/** Draws a sealed rehearsal, with a round of the development chain signed on the spot. `now` in seconds since 1970. */
export function drawRehearsal(sealed: SealedRehearsal, now: number): SettledDraw {
  const { seal, sealDigest, prepared, seed } = sealed
  const round = seal.sources.beacon?.round ?? 1
  const leafOf = leaves(sealed)
  const settled = settleDraw(sha256, {
    seal,
    sealDigest,
    tickets: prepared.tickets,
    reveal: {
      beacon: { round, signature: signDevelopmentRound(sha256, round).signature },
      seed: toHex(seed),
      tosses: null,
    },
    drawnAt: formatTime(Math.floor(now)),
    commitmentsOf: (leaf) => {
      const { salts, label, identity } = leafOf(leaf)
      return commitEntrant(sha256, salts, label, identity)
    },
  })
  if (settled === null) throw new Error('A derived draw never runs out of flips.')
  return settled
}

/** The proof archive of a rehearsal, chunk by chunk. */
export async function* rehearsalArchive(
  sealed: SealedRehearsal,
  drawn: SettledDraw,
  check: CheckFiles,
): AsyncGenerator<Uint8Array> {
  const { prepared, secretKey } = sealed
  const leafOf = leaves(sealed)
  const result = resultBytes(drawn.result)
  const labels = winningLeaves(drawn.result.picks).map((leaf) => {
    const { label, salts } = leafOf(leaf)
    return { label, labelSalt: toHex(salts.labelSalt), leaf }
  })
  const members = lockedMembers({
    'CHECKING.txt': utf8(CHECKING_TEXT),
    'seal.json': sealed.sealBytes,
    'seal.sig': signBytes(secretKey, sealed.sealBytes),
    'terms.txt': utf8(TERMS),
    'entries.csv': writeEntries(prepared.tickets, prepared.entryCommits),
    'result.json': result,
    'result.sig': signBytes(secretKey, result),
    'transcript.jsonl': drawn.transcript,
    'site-key.pem': utf8(encodePem(publicKeyOf(secretKey))),
    ...check,
  })
  const all = [...members, proofMember('labels.jsonl', labelsBytes(labels))]
  const summed = await Promise.all(all.map((member) => sumMember(member, createSha256())))
  yield* writeZip(publicMembers(summed), { deflate: deflateWithZlib })
}

/** The receipts of all entrants, in the order of their leaves. */
export function* rehearsalReceipts(sealed: SealedRehearsal): Generator<Receipt> {
  const leafOf = leaves(sealed)
  for (let leaf = 0; leaf < sealed.entrants.length; leaf++) {
    const { label, identity, tickets, salts } = leafOf(leaf)
    const path = sealed.prepared.tree.path(leaf)
    yield makeReceipt({ sealDigest: sealed.sealDigest, leaf, tickets, label, identity, path, ...salts })
  }
}

interface OpenLeaf {
  readonly label: string
  readonly identity: Identity
  readonly tickets: number
  readonly salts: Salts
}

function leaves({ entrants, prepared, blindingKey }: SealedRehearsal): (leaf: number) => OpenLeaf {
  const saltsOf = createSaltDeriver(sha256, blindingKey)
  return (leaf) => {
    const entrant = entrants[prepared.order[leaf] ?? -1]
    if (entrant === undefined) throw new RangeError(`no leaf ${leaf}`)
    return { ...entrant, salts: saltsOf(entrant.identity.reference) }
  }
}
