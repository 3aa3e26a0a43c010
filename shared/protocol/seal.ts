import { canonicalBytes, parseCanonicalJson, type CanonicalJsonCode } from '../bytes/canonical-json.ts'
import { utf8 } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { concatBytes } from '../bytes/bytes.ts'
import type { Failure, Result } from '../bytes/result.ts'
import { parseTime } from '../bytes/time.ts'
import { isTermsText } from '../bytes/text.ts'
import {
  FORMAT,
  MAX_ENTRANTS,
  MAX_PICKS,
  MAX_REVEAL_DELAY,
  MAX_ROUND_LENGTH,
  MAX_TICKETS,
  MAX_TICKETS_EACH,
  MIN_BITS_WITHOUT_BEACON,
  MIN_ROUND_LENGTH,
  MIN_SEAL_LEAD,
} from './limits.ts'
import { firstRoundFrom, networkOf } from './networks.ts'
import type { Beacon, Seal, SealPrize, SealSources, TossPlan } from './seal-types.ts'
import { hex, list, members, nullable, oneOf, readShape, refuse, text, time, whole, type ShapeCode } from './shape.ts'

/** Why a seal is refused. */
export type SealCode =
  | ShapeCode
  | CanonicalJsonCode
  | 'draw-too-soon'
  | 'reveal-time'
  | 'prizes-missing'
  | 'prize-id-twice'
  | 'too-many-picks'
  | 'ticket-total'
  | 'network-unknown'
  | 'development-chain'
  | 'beacon-round'
  | 'sources-wrong'
  | 'minimum-bits'
  | 'witness-missing'
  | 'supersedes-without-reason'

/** What a check lets pass. */
export interface SealOptions {
  /** Lets the development chain pass; the verdict must then name it. */
  readonly allowDevelopmentChain?: boolean
}

const MEMBERS = [
  'format',
  'kind',
  'draw',
  'organisation',
  'title',
  'key',
  'terms',
  'sealedAt',
  'drawAt',
  'revealBy',
  'entries',
  'prizes',
  'reserves',
  'rule',
  'sources',
  'supersedes',
  'reason',
] as const

/** Parses the signed bytes of a seal: canonical, exactly its members, every rule of PROTOCOL section 3. */
export function parseSeal(bytes: Uint8Array, options: SealOptions = {}): Result<Seal, Failure<SealCode>> {
  const json = parseCanonicalJson(bytes)
  return json.ok ? validateSeal(json.value, options) : json
}

/** Validates a parsed seal, or one about to be written, against every rule of PROTOCOL section 3. */
export function validateSeal(value: unknown, options: SealOptions = {}): Result<Seal, Failure<SealCode>> {
  return readShape<Seal, SealCode>(() => {
    const seal = readSeal(value)
    checkTimes(seal)
    checkCounts(seal)
    checkSources(seal, options)
    if ((seal.supersedes === null) !== (seal.reason === null)) {
      refuse('supersedes-without-reason', 'reason', 'A replaced seal and its reason stand together or not at all.')
    }
    return seal
  })
}

/** The bytes that are signed, logged and published: JCS of the seal. */
export function sealBytes(seal: Seal): Uint8Array {
  return canonicalBytes(seal)
}

/** sealDigest: SHA-256 of the seal's bytes, 32 bytes. */
export function sealDigest(sha256: Sha256, bytes: Uint8Array): Uint8Array {
  return sha256(bytes)
}

/** seedCommit: SHA256(0x05 || seed). Requires a 32-byte seed. */
export function seedCommitment(sha256: Sha256, seed: Uint8Array): Uint8Array {
  if (seed.length !== 32) throw new RangeError('a seed has 32 bytes')
  return sha256(concatBytes(Uint8Array.of(5), seed))
}

/** SHA-256 of `terms.txt`. Throws a RangeError for text that cannot stand there (see `importTerms`). */
export function termsDigest(sha256: Sha256, terms: string): Uint8Array {
  if (!isTermsText(terms)) throw new RangeError('terms must end with exactly one line feed and hold no control')
  return sha256(utf8(terms))
}

function readSeal(value: unknown): Seal {
  const m = members(value, MEMBERS, '')
  const organisation = members(m.organisation, ['name', 'registration'], 'organisation')
  const entries = members(m.entries, ['count', 'root', 'tickets'], 'entries')
  return {
    format: oneOf(m.format, [FORMAT], 'format'),
    kind: oneOf(m.kind, ['seal'], 'kind'),
    draw: text(m.draw, 'draw'),
    organisation: {
      name: text(organisation.name, 'organisation.name'),
      registration: nullable(organisation.registration, (v) => text(v, 'organisation.registration')),
    },
    title: text(m.title, 'title'),
    key: hex(m.key, 32, 'key'),
    terms: hex(m.terms, 32, 'terms'),
    sealedAt: time(m.sealedAt, 'sealedAt'),
    drawAt: time(m.drawAt, 'drawAt'),
    revealBy: nullable(m.revealBy, (v) => time(v, 'revealBy')),
    entries: {
      count: whole(entries.count, 1, MAX_ENTRANTS, 'entries.count'),
      root: hex(entries.root, 32, 'entries.root'),
      tickets: whole(entries.tickets, 1, MAX_TICKETS, 'entries.tickets'),
    },
    prizes: list(m.prizes, 'prizes').map((prize, i) => readPrize(prize, `prizes[${i}]`)),
    reserves: whole(m.reserves, 0, MAX_PICKS, 'reserves'),
    rule: oneOf(m.rule, ['one-prize-each', 'every-ticket'], 'rule'),
    sources: readSources(m.sources),
    supersedes: nullable(m.supersedes, (v) => hex(v, 32, 'supersedes')),
    reason: nullable(m.reason, (v) => text(v, 'reason')),
  }
}

function readPrize(value: unknown, at: string): SealPrize {
  const m = members(value, ['id', 'name', 'quantity'], at)
  return {
    id: text(m.id, `${at}.id`),
    name: text(m.name, `${at}.name`),
    quantity: whole(m.quantity, 1, MAX_PICKS, `${at}.quantity`),
  }
}

function readSources(value: unknown): SealSources {
  const m = members(value, ['beacon', 'flips', 'seedCommit', 'tosses'], 'sources')
  return {
    beacon: nullable(m.beacon, readBeacon),
    flips: oneOf(m.flips, ['derived', 'tossed'], 'sources.flips'),
    seedCommit: nullable(m.seedCommit, (v) => hex(v, 32, 'sources.seedCommit')),
    tosses: nullable(m.tosses, readTossPlan),
  }
}

function readBeacon(value: unknown): Beacon {
  const at = 'sources.beacon'
  const m = members(value, ['chain', 'genesisTime', 'period', 'publicKey', 'round', 'scheme'], at)
  return {
    chain: hex(m.chain, 32, `${at}.chain`),
    genesisTime: whole(m.genesisTime, 0, MAX_TICKETS, `${at}.genesisTime`),
    period: whole(m.period, 1, MAX_TICKETS, `${at}.period`),
    publicKey: hex(m.publicKey, 96, `${at}.publicKey`),
    round: whole(m.round, 1, MAX_TICKETS, `${at}.round`),
    scheme: text(m.scheme, `${at}.scheme`),
  }
}

function readTossPlan(value: unknown): TossPlan {
  const at = 'sources.tosses'
  const m = members(value, ['minimumBits', 'roundLength', 'witnesses'], at)
  return {
    minimumBits: whole(m.minimumBits, 1, MAX_TICKETS, `${at}.minimumBits`),
    roundLength: whole(m.roundLength, MIN_ROUND_LENGTH, MAX_ROUND_LENGTH, `${at}.roundLength`),
    witnesses: list(m.witnesses, `${at}.witnesses`).map((role, i) => text(role, `${at}.witnesses[${i}]`)),
  }
}

function checkTimes(seal: Seal): void {
  const drawAt = parseTime(seal.drawAt) as number
  if (drawAt - (parseTime(seal.sealedAt) as number) < MIN_SEAL_LEAD) {
    refuse('draw-too-soon', 'drawAt', `The draw must be at least ${MIN_SEAL_LEAD} seconds after the sealing.`)
  }
  if (seal.revealBy === null) return
  if (seal.sources.flips === 'tossed') {
    refuse('reveal-time', 'revealBy', 'A draw whose coins are tossed in the hall is revealed as it happens.')
  }
  const delay = (parseTime(seal.revealBy) as number) - drawAt
  if (delay < 0 || delay > MAX_REVEAL_DELAY) {
    refuse('reveal-time', 'revealBy', 'The reveal must be within 24 hours after the draw.')
  }
}

function checkCounts(seal: Seal): void {
  const { count, tickets } = seal.entries
  if (tickets < count || tickets > count * MAX_TICKETS_EACH) {
    refuse('ticket-total', 'entries.tickets', 'So many entrants cannot hold this many tickets.')
  }
  if (seal.prizes.length === 0) refuse('prizes-missing', 'prizes', 'A draw has at least one prize.')
  const ids = new Set<string>()
  let picks = seal.reserves
  for (const [i, prize] of seal.prizes.entries()) {
    if (ids.has(prize.id)) refuse('prize-id-twice', `prizes[${i}].id`, 'This prize id stands here twice.')
    ids.add(prize.id)
    picks += prize.quantity
  }
  if (picks > MAX_PICKS) refuse('too-many-picks', 'prizes', `A draw has at most ${MAX_PICKS} picks.`)
}

function checkSources(seal: Seal, options: SealOptions): void {
  const { beacon, flips, seedCommit, tosses } = seal.sources
  if (flips === 'tossed' && (tosses === null || beacon !== null || seedCommit !== null)) {
    refuse('sources-wrong', 'sources', 'A tossed draw needs tosses and has neither beacon nor seed.')
  }
  if (flips === 'derived' && (seedCommit === null || (beacon === null && tosses === null))) {
    refuse('sources-wrong', 'sources', 'A derived draw needs a seed and at least one of beacon and tosses.')
  }
  if (tosses !== null) {
    if (tosses.witnesses.length === 0) {
      refuse('witness-missing', 'sources.tosses.witnesses', 'Coins are tossed in front of at least one witness.')
    }
    if (flips === 'derived' && beacon === null && tosses.minimumBits < MIN_BITS_WITHOUT_BEACON) {
      const words = `Without a beacon at least ${MIN_BITS_WITHOUT_BEACON} fair bits are needed.`
      refuse('minimum-bits', 'sources.tosses.minimumBits', words)
    }
  }
  if (beacon === null) return
  const network = networkOf(beacon)
  if (network === null) refuse('network-unknown', 'sources.beacon', 'This is not the pinned beacon network.')
  if (network === 'development' && options.allowDevelopmentChain !== true) {
    refuse('development-chain', 'sources.beacon', 'The development chain, whose secret is public, shows nothing.')
  }
  const round = firstRoundFrom(beacon, parseTime(seal.drawAt) as number)
  if (beacon.round !== round) {
    refuse('beacon-round', 'sources.beacon.round', `The first round at or after the draw's time is ${round}.`)
  }
}
