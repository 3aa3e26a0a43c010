import { toHex } from '#shared/bytes/hex.ts'
import { formatTime } from '#shared/bytes/time.ts'
import type { StepNumber } from '#shared/protocol/check/failure.ts'
import type { MEMBER_LIMITS } from '#shared/protocol/check/state.ts'
import { type CheckState } from '#shared/protocol/check/state.ts'

/** A named value that a step read or found: a figure, a digest in hex, or words. Words may come out of the archive. */
export interface StepFact {
  readonly name: string
  readonly value: string | number
}

/** What a step worked on and what came out of it, for whoever opens the step. */
export interface StepFacts {
  readonly inputs: readonly StepFact[]
  readonly outputs: readonly StepFact[]
}

type Value = string | number | null | undefined
type Pairs = readonly (readonly [name: string, value: Value])[]
/** The state as a step left it: after a failure whatever was not reached is missing. */
type Reached = Partial<CheckState> & Pick<CheckState, 'options'>
type Tell = (state: Reached) => { readonly inputs: Pairs; readonly outputs: Pairs }

const FACTS: Readonly<Partial<Record<StepNumber, Tell>>> = {
  1: ({ source, digests }) => ({
    inputs: (source?.names ?? []).map((name) => [`Bytes of ${name}`, source?.size(name)]),
    outputs: [...(digests ?? [])].map(([name, digest]) => [`SHA-256 of ${name}`, digest]),
  }),
  2: ({ publicKey, fingerprint, options }) => ({
    inputs: [
      ['Public key in site-key.pem', publicKey && toHex(publicKey)],
      ['Fingerprint given to compare', options.expectedKey ?? 'none'],
    ],
    outputs: [['Fingerprint of the key', fingerprint]],
  }),
  3: ({ source, seal, sealDigestHex }) => ({
    inputs: [
      ['Bytes of seal.json', sizeOf(source, 'seal.json')],
      ['Bytes of terms.txt', sizeOf(source, 'terms.txt')],
    ],
    outputs: [
      ['Digest of the seal', sealDigestHex],
      ['Digest of the terms', seal?.terms],
      ['Title', seal?.title],
      ['Organisation', seal?.organisation.name],
      ['Sealed at', seal?.sealedAt],
      ['To be drawn at', seal?.drawAt],
      ['Rule', seal?.rule],
      ['Supersedes the seal', seal?.supersedes],
    ],
  }),
  4: ({ entries, entriesRoot, seal }) => ({
    inputs: [
      ['Entrants in entries.csv', entries?.tickets.length],
      ['Sealed entrants', seal?.entries.count],
      ['Sealed tickets', seal?.entries.tickets],
      ['Sealed root', seal?.entries.root],
    ],
    outputs: [
      ['Tickets in entries.csv', entries?.outcome.ok ? entries.outcome.value.tickets : null],
      ['Root of entries.csv', entriesRoot && toHex(entriesRoot)],
    ],
  }),
  5: ({ result, source }) => ({
    inputs: [['Bytes of result.json', sizeOf(source, 'result.json')]],
    outputs: [
      ['Seal that it names', result?.seal],
      ['Drawn at', result?.drawnAt],
      ['Picks', result?.picks.length],
    ],
  }),
  6: ({ seal, result }) => ({
    inputs: [['Sealed commitment', seal?.sources.seedCommit ?? 'none']],
    outputs: [['Seed, opened', result?.reveal.seed]],
  }),
  7: ({ seal, result, beaconRandomness }) => ({
    inputs: [
      ['Sealed round', seal?.sources.beacon?.round ?? 'none'],
      ['Public key of the beacon', seal?.sources.beacon?.publicKey],
      ['Signature of the round', result?.reveal.beacon?.signature],
    ],
    outputs: [['Randomness of the round', beaconRandomness && toHex(beaconRandomness)]],
  }),
  8: ({ seal, result, tossBits }) => ({
    inputs: [
      ['Tosses in a round', seal?.sources.tosses?.roundLength ?? 'none'],
      ['Fair bits needed', seal?.sources.tosses?.minimumBits],
      ['Rounds tossed', result?.reveal.tosses?.length],
    ],
    outputs: [['Fair bits', tossBits?.length]],
  }),
  9: ({ seal, result, drawKey, walked }) => ({
    inputs: [
      ['Draw key', drawKey && toHex(drawKey)],
      ['Tickets', seal?.entries.tickets],
      ['Picks in the result', result?.picks.length],
    ],
    outputs: [
      ['Picks walked', walked?.picks],
      ['Coins', walked?.coins],
      ['Flips', walked?.flips],
    ],
  }),
  10: ({ result, withheld, source }) => ({
    inputs: [
      ['Picks in the result', result?.picks.length],
      ['Bytes of labels.jsonl', sizeOf(source, 'labels.jsonl')],
    ],
    outputs: [['Winning leaves without an open label', withheld?.length]],
  }),
  11: ({ result, transcriptDigest }) => ({
    inputs: [['Digest that the result states', result?.transcript]],
    outputs: [['Digest of transcript.jsonl', transcriptDigest]],
  }),
  12: ({ source, seal, log, shownBy }) => ({
    inputs: [
      ['Bytes of seal.tsr', sizeOf(source, 'seal.tsr')],
      ['Bytes of log-proof.json', sizeOf(source, 'log-proof.json')],
      ['Bytes of replaced.json', sizeOf(source, 'replaced.json')],
      ['Drawn at the earliest', seal?.drawAt],
    ],
    outputs: [
      ['Entry of the log that is this seal', log?.sealed.index],
      ...(shownBy ?? []).map(({ kind, name, at }): [string, string] => [
        kind === 'timestamp' ? 'Timestamped in time by' : 'Cosigned in time by',
        `${name}, ${formatTime(at)}`,
      ]),
    ],
  }),
}

/** Inputs and outputs of a step, as far as it came. Empty for a step that has none to show. */
export function stepFacts(step: StepNumber, state: CheckState): StepFacts {
  const told = FACTS[step]?.(state)
  return { inputs: present(told?.inputs ?? []), outputs: present(told?.outputs ?? []) }
}

function present(pairs: Pairs): StepFact[] {
  return pairs.flatMap(([name, value]) => (value === null || value === undefined ? [] : [{ name, value }]))
}

function sizeOf(source: Reached['source'], name: keyof typeof MEMBER_LIMITS): number | undefined {
  return source?.names.includes(name) ? source.size(name) : undefined
}
