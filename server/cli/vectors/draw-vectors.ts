import { concatBytes } from '#shared/bytes/bytes.ts'
import { canonicalBytes } from '#shared/bytes/canonical-json.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { bitText } from '#shared/sampling/extractors.ts'
import { commitEntrant, compareReferences, deriveSalts, parseIdentity } from '#shared/protocol/commitments.ts'
import { deriveDrawKey } from '#shared/protocol/draw-key.ts'
import { runDraw, type DrawFlips, type DrawOutcome } from '#shared/protocol/draw.ts'
import { duplicateCommit } from '#shared/protocol/duplicate-commit.ts'
import { parseSeal, sealBytes, seedCommitment, validateSeal } from '#shared/protocol/seal.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { checkTosses, tossBits as tossBitsOf } from '#shared/protocol/tosses.ts'
import { transcriptBytes } from '#shared/protocol/transcript.ts'
import { checkPath, checkTree, type TreeEntry } from './tree-vectors.ts'
import {
  expectMembers,
  expectSame,
  hash,
  isObject,
  listOf,
  numberOf,
  reading,
  textOf,
  WrongValue,
} from './wrong-value.ts'

export const DRAW_FIELDS = [
  'mode',
  'rule',
  'prizes',
  'reserves',
  'blindingKey',
  'seal',
  'sealDigest',
  'seed',
  'seedCommit',
  'beaconRandomness',
  'tosses',
  'tossBits',
  'drawKey',
  'entrants',
  'root',
  'totalTickets',
  'paths',
  'picks',
  'transcriptSha256',
] as const

const ENTRANT_FIELDS = [
  'reference',
  'label',
  'identity',
  'labelSalt',
  'identitySalt',
  'labelCommit',
  'identityCommit',
  'entryCommit',
  'tickets',
] as const

type Fields = Readonly<Record<string, unknown>>
const NAME = 'draw'

/** A whole draw: list, tree, seal, sources, draw key, every coin of every pick, transcript. Returns its picks. */
export function checkDraw(value: unknown): number {
  const m = expectMembers(NAME, value, DRAW_FIELDS)
  const entries = checkEntrants(m)
  const tree = checkTree(NAME, entries, { root: m.root, total: m.totalTickets, totalField: 'totalTickets' })
  const twice = duplicateCommit(concatBytes(...entries.map((entry) => entry.entryCommit)), tree.root)
  if (twice !== null) throw new WrongValue(`${NAME}, entrants[${twice}]`, 'entryCommit', 'stands there twice')
  checkPaths(m, tree, entries)
  const seal = checkSeal(m, entries.length)
  const rounds = m.tosses === null ? null : listOf(NAME, 'tosses', m.tosses).map((r) => textOf(NAME, 'tosses', r))
  const { flips, bits } = checkSources(m, seal, rounds)
  const tickets = entries.map((entry) => entry.tickets)
  const { prizes, reserves, rule } = seal
  const outcome = runDraw(hash, { tickets, rule, prizes, reserves, flips })
  checkRounds(seal, rounds, outcome, bits)
  checkPicks(m, outcome)
  expectSame(NAME, 'transcriptSha256', m.transcriptSha256, toHex(hash(transcriptBytes(outcome.picks))))
  return outcome.picks.length
}

function checkEntrants(m: Fields): readonly TreeEntry[] {
  const blindingKey = bytesOf('blindingKey', m.blindingKey, 32)
  let last: string | null = null
  const entries = listOf(NAME, 'entrants', m.entrants).map((value, i) => {
    const name = `${NAME}, entrants[${i}]`
    const e = expectMembers(name, value, ENTRANT_FIELDS)
    const identity = parseIdentity(e.identity)
    if (!identity.ok) throw new WrongValue(name, identity.error.at, identity.error.message)
    const reference = textOf(name, 'reference', e.reference)
    expectSame(name, 'identity.reference', identity.value.reference, reference)
    if (last !== null && compareReferences(last, reference) >= 0) {
      throw new WrongValue(name, 'reference', 'leaves stand in ascending order of reference, none twice')
    }
    last = reference
    const salts = deriveSalts(hash, blindingKey, reference)
    expectSame(name, 'labelSalt', e.labelSalt, toHex(salts.labelSalt))
    expectSame(name, 'identitySalt', e.identitySalt, toHex(salts.identitySalt))
    const label = textOf(name, 'label', e.label)
    const committed = reading(name, 'label', () => commitEntrant(hash, salts, label, identity.value))
    expectSame(name, 'labelCommit', e.labelCommit, toHex(committed.labelCommit))
    expectSame(name, 'identityCommit', e.identityCommit, toHex(committed.identityCommit))
    expectSame(name, 'entryCommit', e.entryCommit, toHex(committed.entryCommit))
    return { tickets: numberOf(name, 'tickets', e.tickets), entryCommit: committed.entryCommit }
  })
  return entries
}

function checkPaths(m: Fields, tree: ReturnType<typeof checkTree>, entries: readonly TreeEntry[]): void {
  if (!isObject(m.paths)) throw new WrongValue(NAME, 'paths', 'an object by leaf number was expected')
  for (const [key, path] of Object.entries(m.paths)) {
    const leaf = Number(key)
    const entry = entries[leaf]
    if (String(leaf) !== key || entry === undefined) throw new WrongValue(NAME, `paths.${key}`, 'there is no such leaf')
    checkPath(NAME, `paths.${key}`, path, { tree, leaf, entry })
  }
}

function checkSeal(m: Fields, count: number): Seal {
  const valid = validateSeal(m.seal, { allowDevelopmentChain: true })
  if (!valid.ok) throw new WrongValue(NAME, `seal.${valid.error.at}`, valid.error.message)
  const seal = valid.value
  // The file's own members, not only those that were understood, must come to the digest.
  const bytes = canonicalBytes(m.seal)
  expectSame(NAME, 'sealDigest', m.sealDigest, toHex(hash(bytes)))
  expectSame(NAME, 'sealDigest (written anew)', m.sealDigest, toHex(hash(sealBytes(seal))))
  const parsed = parseSeal(bytes, { allowDevelopmentChain: true })
  if (!parsed.ok) throw new WrongValue(NAME, `seal.${parsed.error.at}`, parsed.error.message)
  expectSame(NAME, 'mode', m.mode, seal.sources.flips)
  expectSame(NAME, 'rule', m.rule, seal.rule)
  expectSame(NAME, 'prizes', m.prizes, seal.prizes)
  expectSame(NAME, 'reserves', m.reserves, seal.reserves)
  expectSame(NAME, 'seal.entries', seal.entries, { count, root: m.root, tickets: m.totalTickets })
  return seal
}

function checkSources(
  m: Fields,
  seal: Seal,
  rounds: readonly string[] | null,
): { readonly flips: DrawFlips; readonly bits: readonly number[] | null } {
  const { sources } = seal
  expectPresence('seed', m.seed, sources.seedCommit)
  expectPresence('seedCommit', m.seedCommit, sources.seedCommit)
  expectPresence('beaconRandomness', m.beaconRandomness, sources.beacon)
  expectPresence('tosses', m.tosses, sources.tosses)
  expectPresence('tossBits', m.tossBits, sources.tosses)
  let bits: readonly number[] | null = null
  if (sources.tosses !== null && rounds !== null) {
    // How many rounds the walks of a tossed draw need is only known after them: see checkRounds.
    const checked = checkTosses(sources.tosses, rounds, sources.flips === 'tossed' ? Number.MAX_SAFE_INTEGER : null)
    if (!checked.ok && checked.error.code !== 'too-few-bits') {
      throw new WrongValue(NAME, checked.error.at, checked.error.message)
    }
    bits = reading(NAME, 'tosses', () => tossBitsOf(rounds))
    expectSame(NAME, 'tossBits', m.tossBits, bitText(bits))
  }
  if (sources.flips === 'tossed') {
    expectSame(NAME, 'drawKey', m.drawKey, null)
    return { flips: { kind: 'tossed', bits: bits ?? [] }, bits }
  }
  const seed = bytesOf('seed', m.seed, 32)
  expectSame(NAME, 'seedCommit', m.seedCommit, toHex(seedCommitment(hash, seed)))
  expectSame(NAME, 'seal.sources.seedCommit', sources.seedCommit, m.seedCommit)
  const randomness = m.beaconRandomness === null ? null : bytesOf('beaconRandomness', m.beaconRandomness, 32)
  const sealDigest = bytesOf('sealDigest', m.sealDigest, 32)
  const drawKey = deriveDrawKey(hash, { sealDigest, seed, beaconRandomness: randomness, tossBits: bits })
  expectSame(NAME, 'drawKey', m.drawKey, toHex(drawKey))
  return { flips: { kind: 'derived', drawKey }, bits }
}

function checkRounds(
  seal: Seal,
  rounds: readonly string[] | null,
  outcome: DrawOutcome,
  bits: readonly number[] | null,
): void {
  if (seal.sources.tosses === null || rounds === null) return
  if (outcome.end === 'dry') {
    throw new WrongValue(NAME, 'tosses', `the ${bits?.length} fair bits run out in pick ${outcome.picks.length}`)
  }
  const walkFlips = seal.sources.flips === 'tossed' ? outcome.flipsUsed : null
  const checked = checkTosses(seal.sources.tosses, rounds, walkFlips)
  if (!checked.ok) throw new WrongValue(NAME, checked.error.at, checked.error.message)
}

function checkPicks(m: Fields, outcome: DrawOutcome): void {
  const picks = listOf(NAME, 'picks', m.picks)
  for (const [i, pick] of outcome.picks.entries()) {
    const name = `${NAME}, picks[${i}]`
    if (picks[i] === undefined) throw new WrongValue(name, 'pick', 'this pick is missing')
    const p = expectMembers(name, picks[i], ['pick', 'award', 'leaf', 'remaining', 'coins'])
    expectSame(name, 'pick', p.pick, pick.pick)
    expectSame(name, 'award', p.award, pick.award)
    expectSame(name, 'remaining', p.remaining, pick.remaining)
    const coins = listOf(name, 'coins', p.coins)
    for (const [c, coin] of pick.coins.entries()) expectSame(name, `coins[${c}]`, coins[c] ?? null, coin)
    expectSame(name, 'coins', coins.length, pick.coins.length)
    expectSame(name, 'leaf', p.leaf, pick.leaf)
  }
  expectSame(NAME, 'picks', picks.length, outcome.picks.length)
}

function expectPresence(field: string, found: unknown, sealed: unknown): void {
  if ((found === null) === (sealed === null)) return
  throw new WrongValue(NAME, field, sealed === null ? 'the seal names no such source' : 'the seal names this source')
}

function bytesOf(field: string, value: unknown, length: number): Uint8Array {
  return reading(NAME, field, () => hexBytes(textOf(NAME, field, value), length))
}
