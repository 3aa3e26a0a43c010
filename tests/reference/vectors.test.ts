// The second implementation against tests/vectors: check values that a separate implementation of the format made.
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { developmentChain, signRound } from './development-chain.ts'
import * as record from './record.ts'
import type { Coin, Entrant, Identity, Json, Rules, Sibling } from './record.ts'

const { hex, sha256, unhex, utf8 } = record
const read = <T>(name: string): T =>
  JSON.parse(readFileSync(join(import.meta.dirname, '../vectors', `${name}.json`), 'utf8')) as T

it('tosses every coin as the vectors do', () => {
  const coins = read<{ a: number; b: number; flips: string; used: string; heads: boolean }[]>('coins')
  expect(coins.length).toBeGreaterThan(20)
  for (const { a, b, flips, used, heads } of coins) {
    expect(record.coin(BigInt(a), BigInt(b), record.flipsOf(flips))).toEqual([used, heads ? 'H' : 'T'])
  }
})

it('derives the same flips from a draw key', () => {
  for (const { drawKey, pick, first600Flips } of read<{ drawKey: string; pick: number; first600Flips: string }[]>(
    'flips',
  )) {
    const flips = record.derivedFlips(unhex(drawKey), pick)
    expect(Array.from({ length: 600 }, flips).join('')).toBe(first600Flips)
  }
})

it('takes the same fair bits from tosses', () => {
  for (const { tosses, peres } of read<{ tosses: string; peres: string }[]>('extractors')) {
    expect(record.peres(tosses)).toBe(peres)
  }
})

it('builds the same sum trees and paths', () => {
  interface Tree {
    entries: { tickets: number; entryCommit: string }[]
    root: string
    total: number
    paths: Sibling[][]
  }
  for (const tree of read<Tree[]>('sum-trees')) {
    const entries = tree.entries.map(({ tickets, entryCommit }) => ({ tickets, entryCommit: unhex(entryCommit) }))
    expect(hex(record.root(entries))).toBe(tree.root)
    expect(entries.map((_, leaf) => record.path(entries, leaf))).toEqual(tree.paths)
  }
})

it('signs the rounds of the development chain', () => {
  interface Chain {
    publicKey: string
    rounds: { round: number; signature: string; randomness: string; ok: boolean }[]
  }
  const { publicKey, rounds } = read<Chain>('development-chain')
  expect(developmentChain.publicKey).toBe(publicKey)
  for (const { round, signature, randomness } of rounds) {
    expect(hex(signRound(round))).toBe(signature)
    expect(hex(sha256(unhex(signature)))).toBe(randomness)
  }
})

interface DrawVector {
  blindingKey: string
  seal: Rules & { [member: string]: Json } & { entries: { count: number; root: string; tickets: number } }
  sealDigest: string
  seed: string | null
  seedCommit: string | null
  beaconRandomness: string | null
  tosses: string[] | null
  tossBits: string | null
  drawKey: string | null
  entrants: {
    label: string
    identity: Identity
    tickets: number
    labelSalt: string
    identitySalt: string
    labelCommit: string
    identityCommit: string
    entryCommit: string
  }[]
  root: string
  paths: Record<string, Sibling[]>
  picks: { pick: number; award: record.Award; leaf: number; remaining: number; coins: Coin[] }[]
  transcriptSha256: string
}

const draws = [
  'every-ticket',
  'hall-every-ticket',
  'hall-tossed',
  'huge-counts',
  'one-entrant',
  'runs-dry',
  'skewed',
  'village',
]

describe.each(draws)('the draw %s', (name) => {
  const vector = read<DrawVector>(`draw-${name}`)
  const entrants: Entrant[] = vector.entrants.map(({ label, identity, tickets }) => ({ label, identity, tickets }))
  const leaves = record.makeLeaves(unhex(vector.blindingKey), entrants.reverse())

  it('has the same leaves, root and paths', () => {
    expect(leaves.map((leaf) => hex(leaf.entryCommit))).toEqual(vector.entrants.map((entrant) => entrant.entryCommit))
    expect(leaves.map((leaf) => hex(leaf.labelSalt))).toEqual(vector.entrants.map((entrant) => entrant.labelSalt))
    expect(leaves.map((leaf) => hex(leaf.identitySalt))).toEqual(vector.entrants.map((entrant) => entrant.identitySalt))
    expect(hex(record.root(leaves))).toBe(vector.root)
    expect(vector.seal.entries.root).toBe(vector.root)
    for (const [leaf, path] of Object.entries(vector.paths)) expect(record.path(leaves, Number(leaf))).toEqual(path)
  })

  it('has the same seal digest, bits, draw key and commitment', () => {
    expect(hex(sha256(utf8(record.jcs(vector.seal))))).toBe(vector.sealDigest)
    if (vector.tosses) expect(vector.tosses.map(record.peres).join('')).toBe(vector.tossBits)
    if (!vector.seed) return
    const randomness = vector.beaconRandomness === null ? null : unhex(vector.beaconRandomness)
    expect(hex(record.seedCommit(unhex(vector.seed)))).toBe(vector.seedCommit)
    expect(hex(record.drawKey(unhex(vector.sealDigest), unhex(vector.seed), randomness, vector.tossBits))).toBe(
      vector.drawKey,
    )
  })

  it('has the same picks, coins and transcript', () => {
    const tossed = record.flipsOf(vector.tossBits ?? '')
    const picks = record.draw(
      vector.seal,
      leaves.map((leaf) => leaf.tickets),
      (pick) => (vector.drawKey === null ? tossed : record.derivedFlips(unhex(vector.drawKey), pick)),
    )
    expect(picks).toEqual(vector.picks)
    expect(hex(sha256(record.transcript(picks ?? [])))).toBe(vector.transcriptSha256)
  })
})
