import { toHex } from '#shared/bytes/hex.ts'
import { formatTime } from '#shared/bytes/time.ts'
import type { CheckState } from '#shared/protocol/check/state.ts'
import type { Shower } from '#shared/protocol/check/time-members.ts'
import { networkOf } from '#shared/protocol/networks.ts'

/**
 * Whether the seal is shown to be older than the draw (PROTOCOL section 11), and by whom: only a timestamp of an authority,
 * or a checkpoint cosigned by a witness, that the checker trusts shows it. `why` tells of others, in whole sentences.
 */
export type SealedInTime =
  | { readonly shown: true; readonly by: readonly Shower[] }
  | { readonly shown: false; readonly why: readonly string[] }

/** What a check that has passed all its steps says. */
export interface CheckVerdict {
  readonly arithmetic: 'holds'
  readonly sealedInTime: SealedInTime
  /** sealDigest, all 64 hex digits. */
  readonly sealDigest: string
  readonly fingerprint: string
  /** Whether a fingerprint was given to compare the key with. */
  readonly keyCompared: boolean
  readonly developmentChain: boolean
  /** The head of the site's log that lies in the archive and holds what the log says of the draw; null without one. */
  readonly log: { readonly origin: string; readonly size: number; readonly rootHex: string } | null
  /** Winning leaves whose label is not open. */
  readonly withheld: readonly number[]
  readonly notExamined: readonly string[]
}

/** What no check can show, in plain words (PROTOCOL section 11). */
export const BEYOND_ANY_CHECK = [
  'Whether every ticket sold was entered, and no invented entrant was. Receipts, the witness’s sample of stubs and the money show that.',
  'Whether a coin was tossed as it is written down.',
  'That the beacon’s members and the site, all together, did not choose the outcome. A hall that fears this adds tosses.',
] as const

/** Sums up a state in which all steps have passed. */
export function verdictOf(state: CheckState): CheckVerdict {
  const { beacon } = state.seal.sources
  return {
    arithmetic: 'holds',
    sealedInTime: state.shownBy.length > 0 ? { shown: true, by: state.shownBy } : { shown: false, why: state.notShown },
    sealDigest: state.sealDigestHex,
    fingerprint: state.fingerprint,
    keyCompared: state.options.expectedKey !== undefined,
    developmentChain: beacon !== null && networkOf(beacon) === 'development',
    log: logOf(state),
    withheld: state.withheld,
    notExamined: state.notExamined,
  }
}

function logOf({ log }: CheckState): CheckVerdict['log'] {
  if (log === null) return null
  const { origin, size, root } = log.head.checkpoint
  return { origin, size, rootHex: toHex(root) }
}

function timeSentences({ sealedInTime, sealDigest }: CheckVerdict): readonly string[] {
  if (!sealedInTime.shown) {
    const none = 'This archive has none, or none that a key or certificate given to this check vouches for.'
    return [
      'Sealed in time: not shown. Only a timestamp, or a checkpoint cosigned by somebody other than the site, over the seal ' +
        `${sealDigest} from before the draw would show it. ${sealedInTime.why.length > 0 ? sealedInTime.why.join(' ') : none}`,
    ]
  }
  const by = sealedInTime.by.map(({ kind, name, at }) =>
    kind === 'timestamp'
      ? `the timestamp of ${name} at ${formatTime(at)}`
      : `the cosignature of the witness ${name} at ${formatTime(at)}`,
  )
  const sentences = [`Sealed in time: shown by ${by.join(', and by ')}, over the seal ${sealDigest}.`]
  if (sealedInTime.by.some(({ development }) => development)) {
    sentences.push(
      'This is a test: the timestamp is of the development authority, whose key is public, so anybody could have made it.',
    )
  }
  return sentences
}

/** The verdict in whole sentences, the two halves first. */
export function verdictSentences(verdict: CheckVerdict): readonly string[] {
  const sentences = [
    'The arithmetic holds: from this seal and these sources, these picks follow and no others.',
    ...timeSentences(verdict),
  ]
  if (verdict.developmentChain) {
    sentences.push(
      'This is a test: its beacon is the development chain, whose secret is public, so anybody could choose its outcome.',
    )
  }
  sentences.push(
    verdict.keyCompared
      ? 'Signed by the key whose fingerprint was given.'
      : 'Signed by an unknown key. Compare all 64 digits with the fingerprint that the site publishes on its pages, posters ' +
          `and tickets: ${verdict.fingerprint}`,
  )
  if (verdict.log !== null) {
    const { origin, size, rootHex } = verdict.log
    sentences.push(
      `The site’s log ${origin}, at ${size} entries with the root ${rootHex}, holds the opening, this seal and this result. ` +
        'Whether everybody is shown the same log is for those who remember its checkpoints.',
    )
  }
  if (verdict.withheld.length > 0) {
    const leaves = verdict.withheld.slice(0, 20).join(', ') + (verdict.withheld.length > 20 ? ', …' : '')
    sentences.push(
      `Label withheld for ${verdict.withheld.length} winning leaves: ${leaves}. The picks hold without it.`,
    )
  }
  if (verdict.notExamined.length > 0) sentences.push(`Not examined: ${verdict.notExamined.join(', ')}.`)
  return sentences
}
