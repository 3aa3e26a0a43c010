// Whole proof archives, made by the second implementation from a seed, for the check to judge.
import { createPrivateKey, createPublicKey, sign } from 'node:crypto'
import { developmentChain, signRound } from './development-chain.ts'
import * as record from './record.ts'
import type { Entrant, Json, Leaf, Pick } from './record.ts'
import { writeZip } from './zip.ts'

const { hex, jcs, sha256, utf8 } = record

export interface Wanted {
  /** Names the archive and is the seed of everything random in it. */
  seed: string
  entrants: number
  sources: 'beacon' | 'tosses' | 'both' | 'tossed'
  rule: 'one-prize-each' | 'every-ticket'
  /** The quantities of the prizes. */
  quantities: number[]
  reserves: number
  /** The most tickets that an entrant holds; 40 where not given. */
  mostTickets?: number
  minimumBits?: number
  roundLength?: number
  /** Rounds tossed although none was needed any more, which a check refuses. */
  roundsTooMany?: number
  /** Leaves of winners whose label stays closed. */
  withhold?: (leaf: number) => boolean
  /** Changes made before signing, so that a change in a rule and not the signature over it is what a check meets. */
  change?: {
    seal?: (seal: Changeable) => void
    result?: (result: Changeable) => void
    files?: (files: Map<string, Buffer>) => void
  }
  /** Members beyond those of the format, such as a later timestamp. */
  later?: Record<string, string>
}

/** A seal or result on its way into an archive, open to any change. */
export type Changeable = { [member: string]: Json }

export interface Made {
  files: Map<string, Buffer>
  zip: Buffer
  fingerprint: string
  sealDigest: string
  blindingKey: Buffer
  leaves: Leaf[]
  picks: Pick[]
  receipt: (leaf: number) => Buffer
  inclusion: (leaf: number) => Buffer
}

/** Seeded randomness: bytes of HMAC(seed, counter). Chances of a few in 2^32 of bias are of no matter here. */
export function randomFrom(seed: string) {
  let counter = 0
  const bytes = (): Buffer => record.hmac(utf8(seed), record.bigEndian(counter++, 4))
  return { bytes, below: (n: number): number => bytes().readUInt32BE() % n }
}
type Random = ReturnType<typeof randomFrom>

const ALPHABET = '23456789ABCDEFGHJKLMNPQRSTUVWXYZ'
const WORDS = ['Plum', 'Señora Ibáñez', 'stub “nine”', 'back\\slash', 'a/b', '李', '🐝', 'Ólafsdóttir', 'l’Étang']

export function randomEntrants(random: Random, n: number, mostTickets: number): Entrant[] {
  return Array.from({ length: n }, (_, index) => ({
    label: `${WORDS[random.below(WORDS.length)]}, stub ${index + 1}`,
    tickets: 1 + random.below(mostTickets),
    identity: {
      contact: random.below(3) === 0 ? '' : `holder${index}@allotment.example`,
      name: `${WORDS[random.below(WORDS.length)]} ${index}`,
      numbers: random.below(2) === 0 ? '' : `${index * 5 + 1}-${index * 5 + 5}`,
      reference: Array.from({ length: 12 }, () => ALPHABET[random.below(32)]).join(''),
    },
  }))
}

const seconds = (time: string): number => Date.parse(time) / 1000
const ROUND_OF = (drawAt: string): number =>
  Math.ceil((seconds(drawAt) - developmentChain.genesisTime) / developmentChain.period) + 1

export function makeArchive(wanted: Wanted): Made {
  const random = randomFrom(wanted.seed)
  const privateKey = createPrivateKey({
    key: Buffer.concat([record.unhex('302e020100300506032b657004220420'), random.bytes()]),
    format: 'der',
    type: 'pkcs8',
  })
  const publicKey = createPublicKey(privateKey)
  const fingerprint = hex(sha256(publicKey.export({ format: 'der', type: 'spki' })))
  const blindingKey = random.bytes()
  const leaves = record.makeLeaves(blindingKey, randomEntrants(random, wanted.entrants, wanted.mostTickets ?? 40))
  const tickets = leaves.map((leaf) => leaf.tickets)
  const terms = utf8(`Terms of the draw ${wanted.seed}.\n\nTickets cost what the poster says.\n`)

  const derived = wanted.sources !== 'tossed'
  const withBeacon = wanted.sources === 'beacon' || wanted.sources === 'both'
  const withTosses = wanted.sources !== 'beacon'
  const seed = derived ? random.bytes() : null
  const drawAt = `2031-05-04T19:30:0${random.below(10)}Z`
  const round = ROUND_OF(drawAt)
  const roundLength = wanted.roundLength ?? 64
  const minimumBits = wanted.minimumBits ?? (derived ? 64 : 1)
  const prizes = wanted.quantities.map((quantity, index) => ({
    id: `prize-${index}`,
    name: `Marrow ${index}`,
    quantity,
  }))
  const rules = { prizes, reserves: wanted.reserves, rule: wanted.rule }

  const seal = {
    format: 'evenpenny/1',
    kind: 'seal',
    draw: wanted.seed,
    organisation: { name: 'Long Row Allotments', registration: random.below(2) === 0 ? null : 'LR-77' },
    title: 'Marrow Draw “für alle” \\ 2031',
    key: fingerprint,
    terms: hex(sha256(terms)),
    sealedAt: '2031-05-04T19:00:00Z',
    drawAt,
    revealBy: derived && random.below(2) === 0 ? '2031-05-05T19:00:00Z' : null,
    entries: {
      count: leaves.length,
      root: hex(record.root(leaves)),
      tickets: tickets.reduce((sum, one) => sum + one, 0),
    },
    ...structuredClone(rules),
    sources: {
      beacon: withBeacon ? { ...developmentChain, round } : null,
      flips: derived ? 'derived' : 'tossed',
      seedCommit: seed && hex(record.seedCommit(seed)),
      tosses: withTosses ? { minimumBits, roundLength, witnesses: ['the caretaker', 'a neighbour'] } : null,
    },
    supersedes: random.below(2) === 0 ? null : hex(random.bytes()),
    reason: null as string | null,
  }
  if (seal.supersedes !== null) seal.reason = 'The hall could not be had on the first day.'
  wanted.change?.seal?.(seal as unknown as Changeable)
  const sealBytes = utf8(jcs(seal as unknown as Json))
  const sealDigest = sha256(sealBytes)

  // Toss until the bits suffice: the minimum, and under `tossed` the walks.
  const signature = withBeacon ? signRound(round) : null
  const tosses: string[] = []
  const bits = (): string => tosses.map(record.peres).join('')
  const tossRound = (): void => {
    tosses.push(Array.from({ length: roundLength }, () => (random.below(2) === 0 ? 'T' : 'H')).join(''))
  }
  while (withTosses && bits().length < minimumBits) tossRound()
  let picks: Pick[] | null = null
  if (seed) {
    for (let more = 0; more < (wanted.roundsTooMany ?? 0); more++) tossRound()
    const key = record.drawKey(sealDigest, seed, signature && sha256(signature), withTosses ? bits() : null)
    picks = record.draw(rules, tickets, (pick) => record.derivedFlips(key, pick))
  } else {
    const tryTossed = (): Pick[] | null => {
      const flips = record.flipsOf(bits())
      return record.draw(rules, tickets, () => flips)
    }
    for (picks = tryTossed(); !picks; picks = tryTossed()) tossRound()
    for (let more = 0; more < (wanted.roundsTooMany ?? 0); more++) tossRound()
  }
  if (!picks) throw new Error('Derived flips cannot run out.')

  const transcript = record.transcript(picks)
  const leafAt = (index: number): Leaf => {
    const leaf = leaves[index]
    if (!leaf) throw new Error(`There is no leaf ${index}.`)
    return leaf
  }
  const result = {
    format: 'evenpenny/1',
    kind: 'result',
    seal: hex(sealDigest),
    drawnAt: '2031-05-04T19:41:00Z',
    reveal: {
      beacon: signature && { round, signature: hex(signature) },
      seed: seed && hex(seed),
      tosses: withTosses ? tosses : null,
    },
    picks: picks.map(({ award, leaf, pick, remaining }) => ({
      award,
      identityCommit: hex(leafAt(leaf).identityCommit),
      labelCommit: hex(leafAt(leaf).labelCommit),
      leaf,
      pick,
      remaining,
      tickets: leafAt(leaf).tickets,
    })),
    transcript: hex(sha256(transcript)),
  }
  const winners = picks.filter(({ award }) => 'prize' in award).map(({ leaf }) => leaf)
  const opened = [...new Set(winners)].filter((leaf) => !wanted.withhold?.(leaf))
  const labelLine = (leaf: number): string =>
    `${jcs({ label: leafAt(leaf).label, labelSalt: hex(leafAt(leaf).labelSalt), leaf })}\n`

  wanted.change?.result?.(result as unknown as Changeable)
  const resultBytes = utf8(jcs(result as unknown as Json))
  const lines = leaves.map((leaf) => `${leaf.tickets},${hex(leaf.entryCommit)}\n`)
  const files = new Map<string, Buffer>([
    ['seal.json', sealBytes],
    ['seal.sig', sign(null, sealBytes, privateKey)],
    ['entries.csv', utf8(`tickets,entry_commit\n${lines.join('')}`)],
    ['result.json', resultBytes],
    ['result.sig', sign(null, resultBytes, privateKey)],
    ['transcript.jsonl', transcript],
    ['labels.jsonl', utf8(opened.map(labelLine).join(''))],
    ['terms.txt', terms],
    ['site-key.pem', Buffer.from(publicKey.export({ format: 'pem', type: 'spki' }))],
    ['CHECKING.txt', utf8('How to check this archive.\n')],
    ['check.mjs', utf8('// The check stands here.\n')],
    ['bls12-381.mjs', utf8('// The library stands here.\n')],
    ...Object.entries(wanted.later ?? {}).map(([name, text]): [string, Buffer] => [name, utf8(text)]),
  ])
  wanted.change?.files?.(files)
  files.set('SHA256SUMS', sums(files))

  const shown = { format: 'evenpenny/1', seal: hex(sealDigest) }
  return {
    files,
    zip: writeZip(files),
    fingerprint,
    sealDigest: hex(sealDigest),
    blindingKey,
    leaves,
    picks,
    receipt: (leaf) => {
      const { label, labelSalt, identity, identitySalt, tickets: own } = leafAt(leaf)
      const opening = { label, labelSalt: hex(labelSalt), identity, identitySalt: hex(identitySalt) }
      return utf8(jcs({ ...shown, kind: 'receipt', leaf, tickets: own, ...opening, path: record.path(leaves, leaf) }))
    },
    inclusion: (leaf) => {
      const { entryCommit, tickets: own } = leafAt(leaf)
      const path = record.path(leaves, leaf)
      return utf8(jcs({ ...shown, kind: 'inclusion', leaf, tickets: own, entryCommit: hex(entryCommit), path }))
    },
  }
}

/** SHA256SUMS over all the files given, itself left out. */
export function sums(files: ReadonlyMap<string, Buffer>): Buffer {
  const others = [...files].filter(([name]) => name !== 'SHA256SUMS')
  return utf8(others.map(([name, bytes]) => `${hex(sha256(bytes))}  ${name}\n`).join(''))
}
