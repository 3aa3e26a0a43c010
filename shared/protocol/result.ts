import { canonicalBytes, parseCanonicalJson, type CanonicalJsonCode } from '../bytes/canonical-json.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { parseTime } from '../bytes/time.ts'
import { planAwards, sameAward, type Award } from './draw.ts'
import { FORMAT, MAX_ENTRANTS, MAX_PICKS, MAX_TICKETS, MAX_TICKETS_EACH } from './limits.ts'
import type { Seal } from './seal-types.ts'
import { hex, list, members, nullable, oneOf, readShape, refuse, text, time, whole, type ShapeCode } from './shape.ts'

/** A pick in a result; `tickets` are the leaf's sealed ones, `remaining` those in before the pick. */
export interface ResultPick {
  readonly award: Award
  readonly identityCommit: string
  readonly labelCommit: string
  readonly leaf: number
  readonly pick: number
  readonly remaining: number
  readonly tickets: number
}

/** What was opened at the draw: null exactly where the seal names no such source. */
export interface Reveal {
  readonly beacon: { readonly round: number; readonly signature: string } | null
  readonly seed: string | null
  readonly tosses: readonly string[] | null
}

/** A result (PROTOCOL section 8). Digests in lower-case hex. */
export interface DrawResult {
  readonly format: 'evenpenny/1'
  readonly kind: 'result'
  readonly seal: string
  readonly drawnAt: string
  readonly reveal: Reveal
  readonly picks: readonly ResultPick[]
  readonly transcript: string
}

/** Why a result is refused by itself. */
export type ResultShapeCode = ShapeCode | CanonicalJsonCode

/** Why a result does not belong to its seal. */
export type ResultCode =
  | 'seal-mismatch'
  | 'drawn-too-soon'
  | 'reveal-mismatch'
  | 'beacon-round'
  | 'pick-order'
  | 'award-wrong'
  | 'picks-missing'
  | 'too-many-picks'
  | 'leaf-out-of-range'
  | 'remaining-wrong'

/** The bytes that are signed, logged and published: JCS of the result. */
export function resultBytes(result: DrawResult): Uint8Array {
  return canonicalBytes(result)
}

/** Parses the signed bytes of a result: canonical, exactly its members, every value in range. */
export function parseResult(bytes: Uint8Array): Result<DrawResult, Failure<ResultShapeCode>> {
  const json = parseCanonicalJson(bytes)
  return json.ok ? readShape(() => readResult(json.value)) : json
}

/** Reads a parsed result, or one about to be written, as strictly. */
export function validateResult(value: unknown): Result<DrawResult, Failure<ShapeCode>> {
  return readShape(() => readResult(value))
}

/**
 * Checks a result against its seal: the digest, drawnAt ≥ drawAt, `reveal` against `sources`, the beacon's round, and
 * the picks' numbers, awards and ranges. Coins, seed, signature, tosses and commitments are checked elsewhere. `digest`
 * is the seal's, in hex.
 */
export function checkResultAgainstSeal(
  result: DrawResult,
  seal: Seal,
  digest: string,
): Result<true, Failure<ResultCode>> {
  const head = checkResultHead(result, seal, digest)
  if (!head.ok) return head
  const { beacon } = seal.sources
  if (beacon !== null && result.reveal.beacon?.round !== beacon.round) {
    return fail('beacon-round', 'reveal.beacon.round', `The seal names round ${beacon.round}.`)
  }
  return checkPicks(result.picks, seal)
}

/** The first half of it, which a check has as a step of its own (section 11, step 5): digest, time and `reveal`. */
export function checkResultHead(result: DrawResult, seal: Seal, digest: string): Result<true, Failure<ResultCode>> {
  if (result.seal !== digest) return fail('seal-mismatch', 'seal', 'This result belongs to another seal.')
  if ((parseTime(result.drawnAt) as number) < (parseTime(seal.drawAt) as number)) {
    return fail('drawn-too-soon', 'drawnAt', 'The draw stands as drawn before its time.')
  }
  const { reveal } = result
  const { sources } = seal
  for (const [name, sealed, opened] of [
    ['beacon', sources.beacon, reveal.beacon],
    ['seed', sources.seedCommit, reveal.seed],
    ['tosses', sources.tosses, reveal.tosses],
  ] as const) {
    if ((sealed === null) !== (opened === null)) {
      const words = sealed === null ? 'The seal names no such source.' : 'The seal names this source; it is missing.'
      return fail('reveal-mismatch', `reveal.${name}`, words)
    }
  }
  return ok(true)
}

function checkPicks(picks: readonly ResultPick[], seal: Seal): Result<true, Failure<ResultCode>> {
  const awards = planAwards(seal.prizes, seal.reserves)
  if (picks.length === 0) return fail('picks-missing', 'picks', 'A draw has at least one pick.')
  if (picks.length > awards.length) {
    return fail('too-many-picks', 'picks', `The seal names ${awards.length} awards, not ${picks.length}.`)
  }
  for (const [i, pick] of picks.entries()) {
    const at = `picks[${i}]`
    if (pick.pick !== i) return fail('pick-order', `${at}.pick`, `Pick ${i} was expected here.`)
    if (!sameAward(pick.award, awards[i] as Award)) {
      return fail('award-wrong', `${at}.award`, 'This is not the award that comes next.')
    }
    if (pick.leaf >= seal.entries.count) {
      return fail('leaf-out-of-range', `${at}.leaf`, `The list has ${seal.entries.count} leaves.`)
    }
    if (pick.remaining > seal.entries.tickets) {
      return fail('remaining-wrong', `${at}.remaining`, 'More tickets are in than were sealed.')
    }
  }
  return ok(true)
}

function readResult(value: unknown): DrawResult {
  const m = members(value, ['format', 'kind', 'seal', 'drawnAt', 'reveal', 'picks', 'transcript'], '')
  const picks = list(m.picks, 'picks')
  if (picks.length > MAX_PICKS) refuse('value-wrong', 'picks', `A draw has at most ${MAX_PICKS} picks.`)
  return {
    format: oneOf(m.format, [FORMAT], 'format'),
    kind: oneOf(m.kind, ['result'], 'kind'),
    seal: hex(m.seal, 32, 'seal'),
    drawnAt: time(m.drawnAt, 'drawnAt'),
    reveal: readReveal(m.reveal),
    picks: picks.map((pick, i) => readPick(pick, `picks[${i}]`)),
    transcript: hex(m.transcript, 32, 'transcript'),
  }
}

// Letters and lengths of rounds are checked with the tosses (section 11, step 8).
function readReveal(value: unknown): Reveal {
  const m = members(value, ['beacon', 'seed', 'tosses'], 'reveal')
  return {
    beacon: nullable(m.beacon, (v) => {
      const beacon = members(v, ['round', 'signature'], 'reveal.beacon')
      return {
        round: whole(beacon.round, 1, MAX_TICKETS, 'reveal.beacon.round'),
        signature: hex(beacon.signature, 48, 'reveal.beacon.signature'),
      }
    }),
    seed: nullable(m.seed, (v) => hex(v, 32, 'reveal.seed')),
    tosses: nullable(m.tosses, (v) =>
      list(v, 'reveal.tosses').map((r, i) => text(r, `reveal.tosses[${i}]`, 'may-be-empty')),
    ),
  }
}

/** Reads an award strictly; throws inside `readShape`. */
export function readAward(value: unknown, at: string): Award {
  if (typeof value === 'object' && value !== null && Object.hasOwn(value, 'reserve')) {
    const m = members(value, ['reserve'], at)
    return { reserve: whole(m.reserve, 1, MAX_PICKS, `${at}.reserve`) }
  }
  const m = members(value, ['item', 'prize'], at)
  return { item: whole(m.item, 1, MAX_PICKS, `${at}.item`), prize: text(m.prize, `${at}.prize`) }
}

function readPick(value: unknown, at: string): ResultPick {
  const names = ['award', 'identityCommit', 'labelCommit', 'leaf', 'pick', 'remaining', 'tickets'] as const
  const m = members(value, names, at)
  return {
    award: readAward(m.award, `${at}.award`),
    identityCommit: hex(m.identityCommit, 32, `${at}.identityCommit`),
    labelCommit: hex(m.labelCommit, 32, `${at}.labelCommit`),
    leaf: whole(m.leaf, 0, MAX_ENTRANTS - 1, `${at}.leaf`),
    pick: whole(m.pick, 0, MAX_PICKS - 1, `${at}.pick`),
    remaining: whole(m.remaining, 1, MAX_TICKETS, `${at}.remaining`),
    tickets: whole(m.tickets, 1, MAX_TICKETS_EACH, `${at}.tickets`),
  }
}
