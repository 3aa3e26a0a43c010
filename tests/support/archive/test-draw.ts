// A small real draw, made anew in every run from fixed entropy, with a place between any two of its stages where a test
// can change one thing: everything behind that place is hashed, signed and summed anew.
import { createHmac } from 'node:crypto'
import { createSha256 } from '#server/adapters/archive/check-tools.ts'
import { type CheckFiles, readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { CHECKING_TEXT } from '#shared/archive/checking-text.ts'
import { lockedMembers, proofMember, publicMembers, sumMember } from '#shared/archive/proof-archive.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { formatTime, parseTime } from '#shared/bytes/time.ts'
import { canonicalText } from '#shared/bytes/canonical-json.ts'
import { checkpointText, logKey } from '#shared/log/checkpoint.ts'
import { cosign } from '#shared/log/cosignature.ts'
import { formatNote, type NoteKey, noteKey } from '#shared/log/signed-note.ts'
import { commitEntrant, deriveSalts, referenceFromEntropy } from '#shared/protocol/commitments.ts'
import { signDevelopmentRound } from '#shared/protocol/development-chain.ts'
import { prepareEntries, type SealEntrant } from '#shared/protocol/entrants.ts'
import { writeEntries } from '#shared/protocol/entries-csv.ts'
import { labelsBytes } from '#shared/protocol/labels.ts'
import { beaconFor, DEVELOPMENT_CHAIN } from '#shared/protocol/networks.ts'
import { makeReceipt } from '#shared/protocol/receipt.ts'
import { replacedBytes, type ReplacedSeal } from '#shared/protocol/replaced.ts'
import { seedCommitment } from '#shared/protocol/seal.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { settleDraw, winningLeaves } from '#shared/protocol/settle.ts'
import { encodePem, keyFingerprint, publicKeyOf, signBytes } from '#shared/protocol/signature.ts'
import { tossBits } from '#shared/protocol/tosses.ts'
import { signDevelopmentTimestamp } from '#shared/timestamp/development-authority.ts'
import type { WalkRule } from '#shared/sampling/walk.ts'
import { collect } from '#tests/support/archive/collect.ts'
import { TestLog } from '#tests/support/log/test-log.ts'

/** Kinds of draw that tests start from. */
export const BASES = ['beacon', 'beacon-and-tosses', 'tosses-only', 'hall', 'hall-every-ticket', 'corrected'] as const
export type Base = (typeof BASES)[number]

/** The places at which one thing can be changed, in the order in which they are passed. */
export interface Stages {
  publicKey(key: Uint8Array): Uint8Array
  terms(text: string): string
  /** The list before it is sealed: the seal is made for what comes back. */
  list(csv: string): string
  seal(seal: unknown): unknown
  sealText(text: string): string
  transcript(text: string): string
  result(result: unknown): unknown
  resultText(text: string): string
  /** The list as it lies in the archive. */
  entries(csv: string): string
  labels(text: string): string
  signature(record: SignedRecord, signature: Uint8Array, message: Uint8Array): Uint8Array
  /** The leaves of the site's log, a line each, before they are hashed. */
  logLeaves(text: string): string
  /** The checkpoint's lines before they are signed, and the note as it lies in the archive. */
  checkpointText(text: string): string
  checkpoint(note: string): string
  /** Numbers of the entries that are proven: those of the draw. */
  logEntries(own: readonly number[]): readonly number[]
  logProof(text: string): string
  /** The timestamp of the seal: seconds since 1970, what it is over, and its bytes. */
  stampTime(seconds: number): number
  stampImprint(digest: Uint8Array): Uint8Array
  stamp(response: Uint8Array): Uint8Array
  /** The log from before the draw that a witness cosigned: its entries that are proven, proofs, note, and the witness's time. */
  witnessedEntries(own: readonly number[]): readonly number[]
  witnessedProof(text: string): string
  witnessed(note: string): string
  witnessTime(seconds: number): number
  /** The seals that were replaced, oldest first, and the record of them. */
  replacedSeal(seal: unknown, number: number): unknown
  replaced(text: string): string
  /** Whether an archive has this later member. */
  hasLater(name: string): boolean
  member(name: string, bytes: Uint8Array): Uint8Array | null
  extraMembers(): readonly (readonly [string, Uint8Array])[]
  sums(text: string): string
  receipt(receipt: unknown): unknown
  receiptText(text: string): string
}

/** What carries a signature of the site's key. */
export type SignedRecord = 'seal' | 'result' | 'checkpoint' | `replaced-${number}`

const WITNESS_SECRET = new Uint8Array(32).fill(3)
/** An outside witness of the log. */
export const WITNESS: NoteKey = noteKey(sha256, 'lighthouse.example/witness', 4, publicKeyOf(WITNESS_SECRET))

/** The members of an archive in their order, and a receipt of leaf 2. */
export interface TestArchive {
  readonly members: readonly (readonly [name: string, bytes: Uint8Array])[]
  readonly receipt: Uint8Array
  readonly fingerprint: string
  /** Signs all of it. */
  readonly secretKey: Uint8Array
}

const DRAWN_AT = '2026-05-09T18:30:00Z'
const TERMS = 'One ticket, one chance.\nThe draw is public.\n'

const ENTRANTS: readonly (readonly [name: string, tickets: number, numbers: string])[] = [
  ['Ewa Brzozowska', 5, '1-5'],
  ['Tobias Lindqvist', 1, '6'],
  ['Noor Haddad', 12, '7-18'],
  ['Siobhán Keane', 3, ''],
  ['Kwabena Ofori', 30, '22-51'],
  ['Léa Marchand', 7, ''],
  ['Piet de Vries', 2, '59, 60'],
  ['Yuki Tanabe', 1, ''],
  ['Ona Puig', 4, ''],
  ['Rhys Maddox', 20, ''],
  ['Ines Carvalho', 9, ''],
]

/** Bytes that look random and are the same in every run. */
function fixedEntropy(purpose: string, length: number): Uint8Array {
  let bytes = Buffer.alloc(0)
  for (let block = 0; bytes.length < length; block++) {
    bytes = Buffer.concat([
      bytes,
      createHmac('sha256', 'evenpenny test entropy').update(`${purpose}/${block}`).digest(),
    ])
  }
  return new Uint8Array(bytes.subarray(0, length))
}

/** A round of tosses of a coin that favours heads a little. */
function fixedRound(index: number, length: number): string {
  return Array.from(fixedEntropy(`round ${index}`, length), (byte) => (byte < 150 ? 'H' : 'T')).join('')
}

function sourcesOf(base: Base, seed: Uint8Array, drawAt: number): Seal['sources'] {
  const hall = base === 'hall' || base === 'hall-every-ticket'
  const withBeacon = base === 'beacon' || base === 'beacon-and-tosses' || base === 'corrected'
  const tosses = { minimumBits: base === 'tosses-only' ? 64 : 16, roundLength: 32, witnesses: ['Clerk of the parish'] }
  return {
    beacon: withBeacon ? beaconFor(DEVELOPMENT_CHAIN, drawAt) : null,
    flips: hall ? 'tossed' : 'derived',
    seedCommit: hall ? null : toHex(seedCommitment(sha256, seed)),
    tosses: base === 'beacon' || base === 'corrected' ? null : tosses,
  }
}

let checkFiles: Promise<CheckFiles> | null = null

/** Makes the archive of a draw, passing by the stages that are given; the others change nothing. */
export async function testArchive(base: Base, stages: Partial<Stages> = {}): Promise<TestArchive> {
  const rule: WalkRule = base === 'hall-every-ticket' ? 'every-ticket' : 'one-prize-each'
  const seed = fixedEntropy('seed', 32)
  const blindingKey = fixedEntropy('blinding key', 32)
  const secretKey = fixedEntropy('signing key', 32)
  const publicKey = stages.publicKey?.(publicKeyOf(secretKey)) ?? publicKeyOf(secretKey)
  const terms = stages.terms?.(TERMS) ?? TERMS

  const entrants = ENTRANTS.map(([name, tickets, numbers], index): SealEntrant => {
    const reference = referenceFromEntropy(fixedEntropy(`reference ${index}`, 12))
    return { label: name, tickets, identity: { contact: '', name, numbers, reference } }
  })
  const prepared = unwrap(prepareEntries(sha256, blindingKey, entrants))
  const open = (leaf: number) => {
    const entrant = entrants[prepared.order[leaf] as number] as SealEntrant
    return { ...entrant, salts: deriveSalts(sha256, blindingKey, entrant.identity.reference) }
  }
  const csv = new TextDecoder().decode(writeEntries(prepared.tickets, prepared.entryCommits))
  const listed = stages.list?.(csv) ?? csv
  const sealedList = listed === csv ? prepared.tree : rootOf(listed)

  const drawAt = parseTime(DRAWN_AT) as number
  const seal: Seal = {
    format: 'evenpenny/1',
    kind: 'seal',
    draw: 'allotment-spring-draw',
    organisation: { name: 'Lower Meadow Allotments', registration: null },
    title: 'Spring draw for the new well',
    key: keyFingerprint(sha256, publicKey),
    terms: toHex(sha256(utf8(terms))),
    sealedAt: formatTime(drawAt - 3600),
    drawAt: DRAWN_AT,
    revealBy: null,
    entries: { count: sealedList.size, root: toHex(sealedList.root), tickets: sealedList.total },
    prizes: [
      { id: 'barrow', name: 'A wheelbarrow', quantity: 1 },
      { id: 'seeds', name: 'A box of seeds', quantity: 3 },
    ],
    reserves: 2,
    rule,
    sources: sourcesOf(base, seed, drawAt),
    supersedes: null,
    reason: null,
  }
  const sign = (record: SignedRecord, message: Uint8Array) => {
    const signature = signBytes(secretKey, message)
    return stages.signature?.(record, signature, message) ?? signature
  }
  const earlier = base === 'corrected' ? replacedMembers(stages, seal, drawAt, sign) : null
  if (earlier) Object.assign(seal, { supersedes: earlier.last, reason: 'A stub book was found.' })
  const sealText = pass(stages.sealText, canonicalText(pass(stages.seal, structuredClone(seal))))
  const sealBytes = utf8(sealText)
  const sealDigest = sha256(sealBytes)

  const beacon = seal.sources.beacon
  const settle = (rounds: readonly string[] | null) =>
    settleDraw(sha256, {
      seal,
      sealDigest,
      tickets: prepared.tickets,
      reveal: {
        beacon: beacon && { round: beacon.round, signature: signDevelopmentRound(sha256, beacon.round).signature },
        seed: seal.sources.seedCommit === null ? null : toHex(seed),
        tosses: rounds,
      },
      drawnAt: formatTime(drawAt + 4),
      commitmentsOf: (leaf) => commitEntrant(sha256, open(leaf).salts, open(leaf).label, open(leaf).identity),
    })
  const plan = seal.sources.tosses
  const rounds: string[] = []
  const tossRound = () => rounds.push(fixedRound(rounds.length, plan?.roundLength ?? 0))
  while (plan !== null && tossBits(rounds).length < plan.minimumBits) tossRound()
  let settled = settle(plan === null ? null : rounds)
  while (settled === null) {
    tossRound()
    settled = settle(rounds)
  }
  const transcript = pass(stages.transcript, new TextDecoder().decode(settled.transcript))
  const result = { ...settled.result, transcript: toHex(sha256(utf8(transcript))) }
  const resultText = pass(stages.resultText, canonicalText(pass(stages.result, structuredClone(result))))
  const labels = winningLeaves(settled.result.picks).map((leaf) => {
    const { label, salts } = open(leaf)
    return { label, labelSalt: toHex(salts.labelSalt), leaf }
  })

  const log = logMembers(stages, {
    draw: seal.draw,
    sealDigest: toHex(sealDigest),
    resultDigest: toHex(sha256(utf8(resultText))),
    drawAt,
    publicKey,
    sign: (message) => sign('checkpoint', message),
  })
  const stampTime = pass(stages.stampTime, drawAt - 3598)
  const imprint = pass(stages.stampImprint, sealDigest)
  const stamp = signDevelopmentTimestamp({ imprint, nonce: null, certificates: true }, stampTime, 41)
  const later = { ...log, 'seal.tsr': pass(stages.stamp, stamp), ...earlier?.members }
  const has = stages.hasLater ?? (() => true)
  checkFiles ??= readCheckFiles()
  const contents = lockedMembers({
    'CHECKING.txt': utf8(CHECKING_TEXT),
    'seal.json': sealBytes,
    'seal.sig': sign('seal', sealBytes),
    'terms.txt': utf8(terms),
    'entries.csv': utf8(pass(stages.entries, listed)),
    'result.json': utf8(resultText),
    'result.sig': sign('result', utf8(resultText)),
    'transcript.jsonl': utf8(transcript),
    'site-key.pem': utf8(encodePem(publicKey)),
    ...Object.fromEntries(Object.entries(later).filter(([name]) => has(name))),
    ...(await checkFiles),
  })
  contents.push(proofMember('labels.jsonl', utf8(pass(stages.labels, new TextDecoder().decode(labelsBytes(labels))))))
  for (const [name, bytes] of stages.extraMembers?.() ?? []) contents.push(proofMember(name, bytes))
  const summed = await Promise.all(contents.map((member) => sumMember(member, createSha256())))
  const members: [string, Uint8Array][] = []
  for (const member of publicMembers(summed)) {
    if (!('open' in member)) continue
    let bytes = await collect(member.open())
    if (member.name === 'SHA256SUMS') bytes = utf8(pass(stages.sums, new TextDecoder().decode(bytes)))
    const kept = stages.member === undefined ? bytes : stages.member(member.name, bytes)
    if (kept !== null) members.push([member.name, kept])
  }
  const own = open(2)
  const receipt = makeReceipt({
    sealDigest,
    leaf: 2,
    tickets: own.tickets,
    label: own.label,
    identity: own.identity,
    path: prepared.tree.path(2),
    ...own.salts,
  })
  const receiptText = pass(stages.receiptText, canonicalText(pass(stages.receipt, structuredClone(receipt))))
  return { members, receipt: utf8(receiptText), fingerprint: keyFingerprint(sha256, publicKey), secretKey }
}

/** What the site's log says of the draw, between entries of others, and its head. */
function logMembers(
  stages: Partial<Stages>,
  facts: {
    readonly draw: string
    readonly sealDigest: string
    readonly resultDigest: string
    readonly drawAt: number
    readonly publicKey: Uint8Array
    sign(message: Uint8Array): Uint8Array
  },
): Record<string, Uint8Array> {
  const { draw, sealDigest, resultDigest, publicKey } = facts
  const log = new TestLog()
  log.add('autumn-raffle', 'opened')
  log.add(draw, 'opened')
  log.add('autumn-raffle', 'closed')
  log.add(draw, 'closed')
  log.add(draw, 'sealed', sealDigest)
  log.add('autumn-raffle', 'cancelled')
  log.add(draw, 'drawn', resultDigest)
  log.add('winter-raffle', 'opened')
  const leaves = pass(stages.logLeaves, log.leaves.join('\n')).split('\n')
  log.leaves.splice(0, Infinity, ...leaves)
  const own: readonly number[] = leaves.flatMap((leaf, index) => (leaf.includes(`"draw":"${draw}"`) ? [index] : []))
  const text = pass(stages.checkpointText, checkpointText(log.head()))
  const key = logKey(sha256, log.origin, publicKey)
  const note = formatNote({ text, signatures: [{ name: key.name, id: key.id, signature: facts.sign(utf8(text)) }] })
  const proofOf = (entries: readonly number[], size?: number) => new TextDecoder().decode(log.proof(entries, size))
  return {
    'checkpoint.txt': utf8(pass(stages.checkpoint, note)),
    'log-proof.json': utf8(pass(stages.logProof, proofOf(pass(stages.logEntries, own)))),
    'witnessed.txt': utf8(pass(stages.witnessed, cosignedNote(stages, log, key, facts))),
    'witnessed-proof.json': utf8(
      pass(stages.witnessedProof, proofOf(pass(stages.witnessedEntries, [SEALED_ENTRY]), WITNESSED_SIZE)),
    ),
  }
}

/** The entry that seals the draw, and the size at which the witness saw the log. */
const SEALED_ENTRY = 4
const WITNESSED_SIZE = 6

/** The head of the log before the draw, signed by the site and cosigned by the witness of the tests. */
function cosignedNote(
  stages: Partial<Stages>,
  log: TestLog,
  key: NoteKey,
  facts: { readonly drawAt: number; readonly sealDigest: string; sign(message: Uint8Array): Uint8Array },
): string {
  const text = checkpointText(log.head(WITNESSED_SIZE))
  const time = pass(stages.witnessTime, facts.drawAt - 3000)
  const own = { name: key.name, id: key.id, signature: signBytes(fixedEntropy('signing key', 32), utf8(text)) }
  return formatNote({
    text,
    signatures: [own, cosign(text, time, WITNESS, (message) => signBytes(WITNESS_SECRET, message))],
  })
}

/** Two seals before this one, with what a change of the list looks like. */
function replacedMembers(
  stages: Partial<Stages>,
  seal: Seal,
  drawAt: number,
  sign: (record: SignedRecord, message: Uint8Array) => Uint8Array,
): { readonly last: string; readonly members: Record<string, Uint8Array> } {
  const members: Record<string, Uint8Array> = {}
  const counts = [
    { added: 2, changed: 3, removed: 1 },
    { added: 1, changed: 0, removed: 1 },
  ]
  const seals: ReplacedSeal[] = []
  let before: string | null = null
  for (const [index, count] of counts.entries()) {
    const root = toHex(sha256(utf8(`list ${index}`)))
    const entries = { count: index === 0 ? 10 : 11, root, tickets: 90 + index }
    const changes = {
      sealedAt: formatTime(drawAt - 90_000 + index * 3600),
      drawAt: formatTime(drawAt - 7200 + index * 3600),
    }
    const beacon = beaconFor(DEVELOPMENT_CHAIN, drawAt - 7200 + index * 3600)
    const seed = toHex(seedCommitment(sha256, fixedEntropy(`seed ${index}`, 32)))
    const sources = { ...seal.sources, beacon, seedCommit: seed }
    const reason = before === null ? null : 'The hall was flooded.'
    const made: unknown = { ...seal, ...changes, entries, sources, supersedes: before, reason }
    const bytes = utf8(canonicalText(stages.replacedSeal?.(made, index + 1) ?? made))
    const digest = sha256(bytes)
    members[`replaced-${index + 1}.json`] = bytes
    members[`replaced-${index + 1}.sig`] = sign(`replaced-${index + 1}`, bytes)
    const request = { imprint: digest, nonce: null, certificates: true }
    members[`replaced-${index + 1}.tsr`] = signDevelopmentTimestamp(request, drawAt - 89_000 + index * 3600, 7 + index)
    before = toHex(digest)
    seals.push({ ...count, seal: before })
  }
  members['replaced.json'] = utf8(pass(stages.replaced, new TextDecoder().decode(replacedBytes(seals))))
  return { last: before ?? '', members }
}

function pass<T>(stage: ((value: T) => T) | undefined, value: T): T {
  return stage === undefined ? value : stage(value)
}

/** Count, total and root of a list, however odd its lines are: what a dishonest site would seal. */
function rootOf(csv: string): { size: number; root: Uint8Array; total: number } {
  const lines = csv.split('\n').slice(1, -1)
  const hash = (parts: readonly (readonly [number, Uint8Array])[]): readonly [number, Uint8Array] => {
    if (parts.length === 1) return parts[0] as [number, Uint8Array]
    const half = 2 ** Math.ceil(Math.log2(parts.length) - 1)
    const [left, right] = [hash(parts.slice(0, half)), hash(parts.slice(half))]
    const bytes = [Buffer.of(1), u64(left[0]), left[1], u64(right[0]), right[1]]
    return [left[0] + right[0], sha256(new Uint8Array(Buffer.concat(bytes)))]
  }
  const leaves = lines.map((line): readonly [number, Uint8Array] => {
    const [tickets = '', commit = ''] = line.split(',')
    const bytes = Buffer.concat([Buffer.of(0), u64(Number(tickets)), hexBytes(commit)])
    return [Number(tickets), sha256(new Uint8Array(bytes))]
  })
  const [total, root] = hash(leaves)
  return { size: leaves.length, root, total }
}

function u64(value: number): Buffer {
  const bytes = Buffer.alloc(8)
  bytes.writeBigUInt64BE(BigInt(value))
  return bytes
}
