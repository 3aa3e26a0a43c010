import { toHex } from '#shared/bytes/hex.ts'
import { formatTime, parseTime } from '#shared/bytes/time.ts'
import { openCheckpoint } from '#shared/log/checkpoint.ts'
import { verifyCosignatures } from '#shared/log/cosignature.ts'
import { entryIsIn, parseLogProof } from '#shared/log/log-proof.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckState, memberBytes } from '#shared/protocol/check/state.ts'
import { roundTime } from '#shared/protocol/networks.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { DEVELOPMENT_AUTHORITY, isDevelopmentAuthority } from '#shared/timestamp/development-authority.ts'
import { verifyTimestamp } from '#shared/timestamp/verify-timestamp.ts'

/** Somebody other than the site who saw the seal in time. `at` in seconds since 1970. */
export interface Shower {
  readonly kind: 'timestamp' | 'witness'
  readonly name: string
  readonly at: number
  /** The development authority, whose key is public: it shows nothing of a real draw. */
  readonly development: boolean
}

/** Tosses before a beacon's round begin so long before it, in seconds, at most (PROTOCOL section 3). */
const LONGEST_TOSSING = 4 * 3600

/**
 * The first second that is too late: the draw time, or, where a coin may be tossed before it, the earliest moment at
 * which the tosses may begin.
 */
export function timeLimit(seal: Pick<Seal, 'drawAt' | 'sources'>): number {
  const drawAt = parseTime(seal.drawAt) ?? 0
  const { beacon, tosses } = seal.sources
  return beacon !== null && tosses !== null
    ? Math.min(drawAt, roundTime(beacon, beacon.round) - LONGEST_TOSSING)
    : drawAt
}

/** What was found of one timestamp, in a sentence, and whether it shows that the seal is older than the draw. */
export async function checkTimestamp(state: CheckState): Promise<readonly string[]> {
  if (!state.source.names.includes('seal.tsr')) return []
  const { allowDevelopmentAuthority = false, trustedAuthorities = [] } = state.options
  const trusted = [...trustedAuthorities, ...(allowDevelopmentAuthority ? [DEVELOPMENT_AUTHORITY] : [])]
  const question = { imprint: state.sealDigest, trusted }
  const { info, signer, trustedBy } = need(verifyTimestamp(await memberBytes(state, 'seal.tsr'), question), 'seal.tsr')
  const name = signer.name === '' ? 'an authority without a name' : signer.name
  const when = `${name} put a timestamp on the seal at ${formatTime(info.genTime)}`
  if (trustedBy === null) {
    state.notShown.push(`The timestamp is by ${name}, for whom no certificate given here vouches.`)
    return [`${when}; no certificate given here vouches for it.`]
  }
  if (info.latest >= timeLimit(state.seal)) {
    state.notShown.push(`The timestamp by ${name}, of ${formatTime(info.genTime)}, does not come before the draw.`)
    return [`${when}, which is not before the draw and any toss.`]
  }
  const development = isDevelopmentAuthority(trustedBy)
  state.shownBy.push({ kind: 'timestamp', name, at: info.genTime, development })
  return [`${when}, before the draw; ${trustedBy.name || 'a certificate given here'} vouches for it.`]
}

/**
 * A checkpoint from before the draw that outside witnesses cosigned: `witnessed.txt`, signed by the seal's key, and in
 * `witnessed-proof.json` the path by which it holds the entry of the log that sealed the draw.
 */
export async function checkWitnessed(state: CheckState): Promise<readonly string[]> {
  const names = (['witnessed.txt', 'witnessed-proof.json'] as const).filter((name) => state.source.names.includes(name))
  const [first] = names
  const found: string[] = [...cosignaturesOfHead(state)]
  if (first === undefined) return found
  if (names.length === 1) {
    const missing = first === 'witnessed.txt' ? 'witnessed-proof.json' : 'witnessed.txt'
    throw new StepFailure('member-missing', missing, `The archive has ${first} and no ${missing}.`)
  }
  const { sha256 } = state.tools
  const trusted = { publicKeys: [state.publicKey] }
  const head = need(openCheckpoint(sha256, await memberBytes(state, 'witnessed.txt'), trusted), 'witnessed.txt')
  const [entry, ...more] = need(parseLogProof(await memberBytes(state, 'witnessed-proof.json')), 'witnessed-proof.json')
  const seals = entry?.leaf.event === 'sealed' || entry?.leaf.event === 'replaced'
  if (!entry || more.length > 0 || !seals || entry.leaf.digest !== state.sealDigestHex) {
    throw new StepFailure(
      'log-event-missing',
      'witnessed-proof.json entries',
      'This is not the one entry of this seal.',
    )
  }
  if (!entryIsIn(sha256, entry, head.checkpoint)) {
    const words = 'It does not lead to the root in witnessed.txt.'
    throw new StepFailure('log-inclusion', 'witnessed-proof.json entries[0].path', words)
  }
  const before = found.length
  const limit = timeLimit(state.seal)
  for (const { witness, time } of need(verifyCosignatures(head.note, state.options.witnesses ?? []), 'witnessed.txt')) {
    const when = `${witness.name} cosigned the log with this seal at ${formatTime(time)}`
    if (time < limit) {
      state.shownBy.push({ kind: 'witness', name: witness.name, at: time, development: false })
      found.push(`${when}, before the draw.`)
    } else {
      state.notShown.push(`The cosignature of ${witness.name}, of ${formatTime(time)}, does not come before the draw.`)
      found.push(`${when}, which is not before the draw and any toss.`)
    }
  }
  if (found.length > before) return found
  const unknown = head.note.signatures.filter(({ name }) => name !== head.checkpoint.origin).map(({ name }) => name)
  if (unknown.length > 0)
    state.notShown.push(`The log was cosigned by ${unknown.join(', ')}, whose keys were not given.`)
  return [
    ...found,
    `A checkpoint of ${head.checkpoint.size} entries, root ${toHex(head.checkpoint.root)}, holds this seal.`,
  ]
}

/** The newest head may be cosigned too: those cosignatures must be good, and say that the log only grew. */
function cosignaturesOfHead(state: CheckState): readonly string[] {
  if (state.log === null) return []
  const { note } = state.log.head
  return need(verifyCosignatures(note, state.options.witnesses ?? []), 'checkpoint.txt').map(
    ({ witness, time }) => `${witness.name} cosigned the log at ${formatTime(time)}.`,
  )
}
