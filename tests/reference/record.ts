// The record format a second time, written from its description alone, in the plainest way: recursion over whole slices, big integers,
// lists of bits. It is slow and meant to be: it shares no code with the product and none of its shortcuts.
import { createHash, createHmac, hkdfSync } from 'node:crypto'

export type Json = null | boolean | number | string | Json[] | { [member: string]: Json }

export const sha256 = (...parts: Uint8Array[]): Buffer => createHash('sha256').update(Buffer.concat(parts)).digest()
export const hmac = (key: Uint8Array, ...parts: Uint8Array[]): Buffer =>
  createHmac('sha256', key).update(Buffer.concat(parts)).digest()
export const hex = (bytes: Uint8Array): string => Buffer.from(bytes).toString('hex')
export const unhex = (text: string): Buffer => Buffer.from(text, 'hex')
export const utf8 = (text: string): Buffer => Buffer.from(text, 'utf8')

/** A whole number as `bytes` bytes, big-endian. */
export function bigEndian(value: number | bigint, bytes: number): Buffer {
  return unhex(
    BigInt(value)
      .toString(16)
      .padStart(2 * bytes, '0'),
  )
}
const u32 = (value: number): Buffer => bigEndian(value, 4)
const u64 = (value: number | bigint): Buffer => bigEndian(value, 8)
const tag = (value: number): Buffer => Buffer.of(value)

/** RFC 8785, for the values that the format uses. */
export function jcs(value: Json): string {
  if (value === null || typeof value !== 'object') return JSON.stringify(value)
  if (Array.isArray(value)) return `[${value.map(jcs).join(',')}]`
  const names = Object.keys(value).sort((a, b) => (a < b ? -1 : 1))
  return `{${names.map((name) => `${JSON.stringify(name)}:${jcs(value[name] ?? null)}`).join(',')}}`
}

// ---- Section 1 ----

export interface Identity {
  [member: string]: string
  contact: string
  name: string
  numbers: string
  reference: string
}

export interface Entrant {
  label: string
  identity: Identity
  tickets: number
}

export interface Leaf extends Entrant {
  labelSalt: Buffer
  identitySalt: Buffer
  labelCommit: Buffer
  identityCommit: Buffer
  entryCommit: Buffer
}

export function makeLeaf(blindingKey: Uint8Array, entrant: Entrant): Leaf {
  const secret = hmac(blindingKey, utf8(entrant.identity.reference))
  const labelSalt = hmac(secret, utf8('label'))
  const identitySalt = hmac(secret, utf8('identity'))
  const labelCommit = sha256(tag(3), labelSalt, utf8(entrant.label))
  const identityCommit = sha256(tag(4), identitySalt, utf8(jcs(entrant.identity)))
  const entryCommit = sha256(tag(2), labelCommit, identityCommit)
  return { ...entrant, labelSalt, identitySalt, labelCommit, identityCommit, entryCommit }
}

/** All leaves, in ascending order of reference. */
export function makeLeaves(blindingKey: Uint8Array, entrants: Entrant[]): Leaf[] {
  const ordered = [...entrants].sort((a, b) => (a.identity.reference < b.identity.reference ? -1 : 1))
  return ordered.map((entrant) => makeLeaf(blindingKey, entrant))
}

// ---- Section 2 ----

export interface Entry {
  tickets: number
  entryCommit: Buffer
}

export interface Sibling {
  [member: string]: string | number
  side: 'L' | 'R'
  tickets: number
  hash: string
}

const ticketsIn = (entries: readonly Entry[]): bigint => entries.reduce((sum, entry) => sum + BigInt(entry.tickets), 0n)

/** The largest power of two smaller than n, n > 1. */
function split(n: number): number {
  let k = 1
  while (2 * k < n) k *= 2
  return k
}

export function root(entries: readonly Entry[]): Buffer {
  const [first] = entries
  if (!first) throw new Error('A tree has at least one leaf.')
  if (entries.length === 1) return sha256(tag(0), u64(first.tickets), first.entryCommit)
  const k = split(entries.length)
  const [left, right] = [entries.slice(0, k), entries.slice(k)]
  return sha256(tag(1), u64(ticketsIn(left)), root(left), u64(ticketsIn(right)), root(right))
}

/** The siblings of leaf i, from the leaf up. */
export function path(entries: readonly Entry[], i: number): Sibling[] {
  if (entries.length === 1) return []
  const k = split(entries.length)
  const [left, right] = [entries.slice(0, k), entries.slice(k)]
  return i < k
    ? [...path(left, i), { side: 'R', tickets: Number(ticketsIn(right)), hash: hex(root(right)) }]
    : [...path(right, i - k), { side: 'L', tickets: Number(ticketsIn(left)), hash: hex(root(left)) }]
}

// ---- Section 4 ----

/** Peres's extractor on a round written as H and T; gives 0s and 1s as text. */
export function peres(round: string): string {
  const bits = [...round].map((toss) => (toss === 'H' ? 1 : 0))
  const extract = (x: number[]): string => {
    if (x.length < 2) return ''
    const pairs = Array.from({ length: x.length >> 1 }, (_, i): [number, number] => [x[2 * i] ?? 0, x[2 * i + 1] ?? 0])
    const unequal = pairs.filter(([a, b]) => a !== b).map(([a]) => a)
    const equal = pairs.filter(([a, b]) => a === b).map(([a]) => a)
    return unequal.join('') + extract(pairs.map(([a, b]) => a ^ b)) + extract(equal)
  }
  return extract(bits)
}

// ---- Section 5 ----

/** SHA256(0x06 || u32(bit count) || bits padded with 0). */
export function packBits(bits: string): Buffer {
  const padded = bits.padEnd(8 * Math.ceil(bits.length / 8), '0')
  const bytes = (padded.match(/.{8}/g) ?? []).map((eight) => Number.parseInt(eight, 2))
  return sha256(tag(6), u32(bits.length), Buffer.from(bytes))
}

export const seedCommit = (seed: Uint8Array): Buffer => sha256(tag(5), seed)

export function drawKey(
  sealDigest: Uint8Array,
  seed: Uint8Array,
  randomness: Uint8Array | null,
  bits: string | null,
): Buffer {
  const ikm = Buffer.concat([seed, randomness ?? Buffer.alloc(0), bits === null ? Buffer.alloc(0) : packBits(bits)])
  return Buffer.from(hkdfSync('sha256', ikm, sealDigest, utf8('evenpenny/1 draw'), 32))
}

/** Where flips come from, one at a time; null when they have run out. */
export type Flips = () => number | null

export function flipsOf(bits: string): Flips {
  let next = 0
  return () => (next < bits.length ? Number(bits[next++]) : null)
}

/** The flips of pick k under `derived`. */
export function derivedFlips(key: Uint8Array, pick: number): Flips {
  let waiting: string[] = []
  let block = 0
  return () => {
    if (waiting.length === 0) {
      const bytes = hmac(key, u32(pick), u32(block++))
      waiting = [
        ...BigInt(`0x${hex(bytes)}`)
          .toString(2)
          .padStart(256, '0'),
      ]
    }
    return Number(waiting.shift())
  }
}

// ---- Section 6 ----

/** A coin with chance a/b of heads: the flips used and the side, or null where the flips run out. */
export function coin(a: bigint, b: bigint, flips: Flips): [string, 'H' | 'T'] | null {
  if (a === 0n) return ['', 'T']
  if (a === b) return ['', 'H']
  let used = ''
  let r = a
  for (;;) {
    r *= 2n
    const d = r >= b ? 1 : 0
    if (d === 1) r -= b
    const s = flips()
    if (s === null) return null
    used += String(s)
    if (s < d) return [used, 'H']
    if (s > d) return [used, 'T']
    if (r === 0n) return [used, 'T']
  }
}

// ---- Section 7 ----

export type Award = { item: number; prize: string } | { reserve: number }
export type Coin = [number, number, string, 'H' | 'T']
export interface Prize {
  [member: string]: string | number
  id: string
  name: string
  quantity: number
}
export interface Rules {
  prizes: Prize[]
  reserves: number
  rule: 'one-prize-each' | 'every-ticket'
}
export interface Pick {
  pick: number
  award: Award
  leaf: number
  remaining: number
  coins: Coin[]
}

export function awards({ prizes, reserves }: Omit<Rules, 'rule'>): Award[] {
  const items = prizes.flatMap(({ id, quantity }) =>
    Array.from({ length: quantity }, (_, j): Award => ({ item: j + 1, prize: id })),
  )
  return [...items, ...Array.from({ length: reserves }, (_, j): Award => ({ reserve: j + 1 }))]
}

/** One walk over the tickets still in, from leaf `from` on; null where the flips run out. */
function walk(still: readonly bigint[], from: number, flips: Flips): { leaf: number; coins: Coin[] } | null {
  if (still.length === 1) return { leaf: from, coins: [] }
  const k = split(still.length)
  const sum = (part: readonly bigint[]): bigint => part.reduce((total, tickets) => total + tickets, 0n)
  const [left, right] = [still.slice(0, k), still.slice(k)]
  const [l, r] = [sum(left), sum(right)]
  const tossed = coin(l, l + r, flips)
  if (!tossed) return null
  const below = tossed[1] === 'H' ? walk(left, from, flips) : walk(right, from + k, flips)
  return below && { leaf: below.leaf, coins: [[Number(l), Number(r), ...tossed], ...below.coins] }
}

/** All picks; null where the flips run out. */
export function draw(rules: Rules, tickets: number[], flipsFor: (pick: number) => Flips): Pick[] | null {
  const still = tickets.map(BigInt)
  const picks: Pick[] = []
  for (const award of awards(rules)) {
    const remaining = still.reduce((total, one) => total + one, 0n)
    if (remaining === 0n) break
    const walked = walk(still, 0, flipsFor(picks.length))
    if (!walked) return null
    picks.push({ pick: picks.length, award, remaining: Number(remaining), ...walked })
    still[walked.leaf] = rules.rule === 'every-ticket' ? (still[walked.leaf] ?? 0n) - 1n : 0n
  }
  return picks
}

// ---- Section 8 ----

export function transcript(picks: Pick[]): Buffer {
  return utf8(picks.map(({ coins, leaf, pick }) => `${jcs({ coins, leaf, pick })}\n`).join(''))
}

// ---- Section 12 ----

/** The leaves of the witness's sample: up to 59 walks under `every-ticket`. */
export function sample(entries: Entry[], randomness: Uint8Array): number[] {
  const key = Buffer.from(hkdfSync('sha256', randomness, root(entries), utf8('evenpenny/1 sample'), 32))
  const rules: Rules = { prizes: [{ id: 's', name: 's', quantity: 59 }], reserves: 0, rule: 'every-ticket' }
  const tickets = entries.map((entry) => entry.tickets)
  return (draw(rules, tickets, (pick) => derivedFlips(key, pick)) ?? []).map((pick) => pick.leaf)
}
