import { z } from 'zod'
import type { Endpoint } from '../endpoint.ts'
import type { PublicEndpoint } from '../public-endpoint.ts'
import { empty, hex32, instant, slug } from '../values.ts'
import { LOG_EXAMPLE } from './log-examples.ts'

/** The site's log (PROTOCOL section 13): its head, its entries and its proofs. */

/** Entries of one call, at most. */
export const LOG_ENTRIES_A_CALL = 100

const index = z.int().min(0).describe('Number of the entry, from 0.')
const size = z.int().min(0).describe('How many entries the log has there.')
const path = z.array(hex32).max(64)
/** Numbers arrive as text; more than 2^53 − 1 entries no log will have. */
const number = (least: number) => z.coerce.number().int().min(least).max(Number.MAX_SAFE_INTEGER)

export const logHead = z.object({
  origin: z.string().describe('Name of the log: the first line of its checkpoints.'),
  size,
  root: hex32.describe('Root of the tree over all entries (RFC 9162 section 2.1.1).'),
  note: z.string().describe('The checkpoint itself, a signed note (C2SP signed-note, tlog-checkpoint): verify this.'),
  keyFingerprint: hex32.describe('SHA-256 of the SubjectPublicKeyInfo of the key that signed it.'),
  publicKey: hex32.describe('The raw Ed25519 key that signed it. Compare its fingerprint with one from elsewhere.'),
})
export type LogHead = z.infer<typeof logHead>

const provenLeaf = z.object({
  index,
  leaf: z.string().describe('The data of the leaf as text: canonical JSON. Hash these bytes.'),
  path: path.describe('Siblings from the leaf up.'),
})

export const logEntriesV1 = z.object({
  size: size.describe('How many entries the log has now.'),
  entries: z.array(
    z.object({
      index,
      leaf: z.string().describe('The data of the leaf as text: canonical JSON. Hash these bytes.'),
      note: z
        .object({ salt: hex32, text: z.string() })
        .nullable()
        .describe('What the digest in the leaf hides; null where there is none, or where it was taken down.'),
    }),
  ),
})

export const logInclusionV1 = provenLeaf.extend({ size, root: hex32 })
export const logConsistencyV1 = z.object({
  first: size,
  second: size,
  firstRoot: hex32,
  secondRoot: hex32,
  path: path.describe('RFC 9162 section 2.1.4; empty where the sizes are equal.'),
})

/** What the log says of one draw, each entry with its path to the head. */
export const drawLog = z.object({ head: logHead, entries: z.array(provenLeaf) })
export type DrawLog = z.infer<typeof drawLog>

/** A draw whose time has come and that has no result. */
export const overdueDraw = z.object({
  slug,
  title: z.string(),
  organisation: z.object({ slug, name: z.string() }),
  drawAt: instant,
  seal: hex32,
})

export const logState = z.object({
  head: logHead,
  /** The newest checkpoint in the object store, and when it was signed. */
  kept: z.object({ size, at: instant }).nullable(),
  overdue: z.array(overdueDraw),
})
export type LogState = z.infer<typeof logState>

/** The names under which these shapes stand in the public description. */
export const logShapes = {
  LogCheckpoint: logHead,
  LogEntries: logEntriesV1,
  LogInclusionProof: logInclusionV1,
  LogConsistencyProof: logConsistencyV1,
} as const

export const getLogCheckpointV1 = {
  name: 'getLogCheckpointV1',
  method: 'GET',
  path: '/api/v1/log/checkpoint',
  summary: "The head of the site's log, signed",
  description:
    'The log as it stands now. The same note as plain text is at /log/checkpoint.txt. Remember it, and ask for a consistency proof the next time: the log may only grow.',
  params: empty,
  query: empty,
  body: empty,
  response: logHead,
  caching: 'revalidate',
  example: { params: {}, query: {}, response: LOG_EXAMPLE.head },
} as const satisfies PublicEndpoint

export const listLogEntriesV1 = {
  name: 'listLogEntriesV1',
  method: 'GET',
  path: '/api/v1/log/entries',
  summary: 'Entries of the log, as they are hashed',
  description: `From one number to another, both included, ${LOG_ENTRIES_A_CALL} in a call at most; fewer where the log ends. A reason stands beside its entry, with its salt, until it is taken down.`,
  params: empty,
  query: z.object({ from: number(0).default(0), to: number(0).optional() }),
  body: empty,
  response: logEntriesV1,
  caching: 'revalidate',
  example: { params: {}, query: { from: 0, to: 1 }, response: LOG_EXAMPLE.entries },
} as const satisfies PublicEndpoint

export const getLogInclusionV1 = {
  name: 'getLogInclusionV1',
  method: 'GET',
  path: '/api/v1/log/inclusion',
  summary: 'The proof that an entry stands in the log',
  description: 'RFC 9162 section 2.1.3, to the root that the log had at a size. The answer never changes.',
  params: empty,
  query: z.object({ index: number(0), size: number(1) }),
  body: empty,
  response: logInclusionV1,
  caching: 'immutable',
  example: { params: {}, query: { index: 1, size: 3 }, response: LOG_EXAMPLE.inclusion },
} as const satisfies PublicEndpoint

export const getLogConsistencyV1 = {
  name: 'getLogConsistencyV1',
  method: 'GET',
  path: '/api/v1/log/consistency',
  summary: 'The proof that the log only grew',
  description: 'RFC 9162 section 2.1.4, from the root at one size to that at a later one. The answer never changes.',
  params: empty,
  query: z.object({ first: number(1), second: number(1) }),
  body: empty,
  response: logConsistencyV1,
  caching: 'immutable',
  example: { params: {}, query: { first: 2, second: 3 }, response: LOG_EXAMPLE.consistency },
} as const satisfies PublicEndpoint

export const getLogState = {
  name: 'getLogState',
  method: 'GET',
  path: '/api/log/state',
  summary: 'The head of the log and the draws that are overdue',
  params: empty,
  query: empty,
  body: empty,
  response: logState,
} as const satisfies Endpoint

export const getDrawLog = {
  name: 'getDrawLog',
  method: 'GET',
  path: '/api/draws/:slug/log',
  summary: 'What the log says of one draw, with proofs',
  params: z.object({ slug }),
  query: empty,
  body: empty,
  response: drawLog,
} as const satisfies Endpoint
