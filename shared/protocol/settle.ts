import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { type DrawFlips, type DrawOutcome, runDraw } from '#shared/protocol/draw.ts'
import { deriveDrawKey } from '#shared/protocol/draw-key.ts'
import { FORMAT } from '#shared/protocol/limits.ts'
import type { DrawResult, ResultPick, Reveal } from '#shared/protocol/result.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { tossBits } from '#shared/protocol/tosses.ts'
import { transcriptBytes } from '#shared/protocol/transcript.ts'

/** Everything that settles a draw. Sources in `reveal` are null exactly where the seal names none, and verified. */
export interface SettleInput {
  readonly seal: Seal
  /** 32 bytes. */
  readonly sealDigest: Uint8Array
  /** The sealed tickets, leaf by leaf. */
  readonly tickets: ArrayLike<number>
  readonly reveal: Reveal
  /** A time of the record, at or after the seal's `drawAt`. */
  readonly drawnAt: string
  /** The two commitments of a leaf, 32 bytes each. */
  readonly commitmentsOf: (leaf: number) => { readonly labelCommit: Uint8Array; readonly identityCommit: Uint8Array }
}

export interface SettledDraw {
  readonly result: DrawResult
  /** The bytes of `transcript.jsonl`. */
  readonly transcript: Uint8Array
  readonly outcome: DrawOutcome
}

/**
 * Makes the picks, the transcript and the result of a draw (PROTOCOL sections 5 to 8). Returns null where a `tossed`
 * draw needs another round of tosses: nothing of it may be published then.
 */
export function settleDraw(sha256: Sha256, input: SettleInput): SettledDraw | null {
  const { seal, tickets } = input
  const outcome = runDraw(sha256, {
    tickets,
    rule: seal.rule,
    prizes: seal.prizes,
    reserves: seal.reserves,
    flips: flipsOf(sha256, input),
  })
  if (outcome.end === 'dry') return null
  const transcript = transcriptBytes(outcome.picks)
  const picks = outcome.picks.map((pick): ResultPick => {
    const { labelCommit, identityCommit } = input.commitmentsOf(pick.leaf)
    return {
      award: pick.award,
      identityCommit: toHex(identityCommit),
      labelCommit: toHex(labelCommit),
      leaf: pick.leaf,
      pick: pick.pick,
      remaining: pick.remaining,
      tickets: tickets[pick.leaf] ?? 0,
    }
  })
  const result: DrawResult = {
    format: FORMAT,
    kind: 'result',
    seal: toHex(input.sealDigest),
    drawnAt: input.drawnAt,
    reveal: input.reveal,
    picks,
    transcript: toHex(sha256(transcript)),
  }
  return { result, transcript, outcome }
}

/**
 * The leaves whose labels are open once a draw is drawn: those that won a prize. In the order of `labels.jsonl`, because
 * reserves are drawn behind all prizes, so that a winner's first pick is a prize.
 */
export function winningLeaves(picks: readonly Pick<ResultPick, 'award' | 'leaf'>[]): readonly number[] {
  return [...new Set(picks.filter(({ award }) => 'prize' in award).map(({ leaf }) => leaf))]
}

function flipsOf(sha256: Sha256, { seal, sealDigest, reveal }: SettleInput): DrawFlips {
  const bits = reveal.tosses === null ? null : tossBits(reveal.tosses)
  if (seal.sources.flips === 'tossed') return { kind: 'tossed', bits: bits ?? [] }
  if (reveal.seed === null) throw new TypeError('a derived draw is settled with its seed')
  const beaconRandomness = reveal.beacon === null ? null : sha256(hexBytes(reveal.beacon.signature, 48))
  const key = { sealDigest, seed: hexBytes(reveal.seed, 32), beaconRandomness, tossBits: bits }
  return { kind: 'derived', drawKey: deriveDrawKey(sha256, key) }
}
