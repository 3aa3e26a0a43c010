import { z } from 'zod'
import type { PublicEndpoint } from '../public-endpoint.ts'
import { empty, hex32, instant, money, page, paged, rule, slug, totalTickets } from '../values.ts'
import {
  DRAW_EXAMPLE,
  INCLUSION_EXAMPLE,
  LIST_EXAMPLE,
  RESULT_EXAMPLE,
  SEAL_EXAMPLE,
  TRANSCRIPT_EXAMPLE,
} from './v1-examples.ts'

/** Version 1 of the public JSON: fields may be added to it, none is taken away or given another meaning. */

const hex64 = z.string().regex(/^[0-9a-f]{128}$/)
const side = z.enum(['H', 'T'])
const leaf = z.int().min(0).max(1_999_999).describe('Number of the leaf in the sealed list, from 0.')
const pick = z.int().min(0).max(99_999).describe('Number of the pick, from 0.')
const ticketsEach = z.int().min(1).max(4_294_967_295)
const beacon = z.object({
  network: z.enum(['quicknet', 'development']),
  chain: hex32.describe('Hash of the beacon chain.'),
  round: z.int().min(1),
  at: instant,
})
const draw = z.object({ slug, title: z.string() })
/** A draft is nobody's business: it has no public state. */
const state = z
  .enum(['open', 'closed', 'sealed', 'drawn', 'concluded', 'cancelled', 'failed'])
  .describe('Where the draw stands. A draw is public from its opening on, whatever becomes of it.')

export const drawV1 = z.object({
  slug,
  title: z.string(),
  goodCause: z.string(),
  organisation: z.object({ slug, name: z.string() }),
  state,
  demo: z.boolean().describe('The draw is invented, to show how the site works.'),
  timeZone: z.string().describe('IANA name of the time zone in which the promoter announces times.'),
  closesAt: instant,
  drawAt: instant,
  drawnAt: instant.nullable(),
  entrants: z.int().min(1).nullable().describe('From the seal on.'),
  tickets: totalTickets.nullable().describe('From the seal on.'),
  prizes: z.int().min(0).describe('How many items are to be won.'),
  page: z.url(),
})

export const drawDetailV1 = drawV1.extend({
  promoter: z.object({ name: z.string(), address: z.string() }),
  licence: z.string().nullable().describe("The promoter's own statement. The site does not vouch for it."),
  ticketPrice: money.nullable(),
  minimumAge: z.int().nullable(),
  rule: rule.describe('Whether a winner stays in for further prizes with the tickets that have not won.'),
  reserves: z.int().min(0),
  prizeList: z.array(
    z.object({ id: z.string(), name: z.string(), quantity: z.int().min(1), donor: z.string().nullable() }),
  ),
  terms: z.string(),
  seal: hex32.nullable().describe('Digest of the seal in force: the key of /api/v1/seals.'),
  replacedSeals: z.array(hex32).describe('Digests of the seals that were replaced, oldest first.'),
  result: hex32.nullable().describe('Digest of the result.'),
  history: z.array(
    z.object({
      index: z.int().min(0),
      at: instant,
      event: z.string(),
      digest: hex32.nullable(),
      note: z.string().nullable(),
    }),
  ),
  files: z
    .array(z.url())
    .describe('The public files as they are now: the very bytes that were signed, and the proof archive.'),
})

export const sealV1 = z.object({
  digest: hex32.describe('SHA-256 of the signed bytes.'),
  signature: hex64.describe('Ed25519 over the signed bytes.'),
  signed: z.string().describe('The signed bytes as text: canonical JSON (RFC 8785). Hash and verify these.'),
  draw,
  keyFingerprint: hex32,
  sealedAt: instant,
  drawAt: instant,
  root: hex32.describe('Root of the sum tree over the list.'),
  entrants: z.int().min(1),
  tickets: totalTickets,
  rule,
  reserves: z.int().min(0),
  prizes: z.array(z.object({ id: z.string(), name: z.string(), quantity: z.int().min(1) })),
  beacon: beacon.nullable(),
  seedCommit: hex32.nullable(),
  supersedes: hex32.nullable(),
  reason: z.string().nullable(),
  timestamp: z.object({ at: instant, authority: z.string() }).nullable(),
})

const award = z.union([
  z.object({ kind: z.literal('prize'), prize: z.string(), name: z.string(), item: z.int().min(1), of: z.int().min(1) }),
  z.object({ kind: z.literal('reserve'), reserve: z.int().min(1) }),
])

export const resultV1 = z.object({
  digest: hex32,
  signature: hex64,
  draw,
  seal: hex32,
  drawnAt: instant,
  drawKey: hex32.nullable(),
  seed: hex32.nullable(),
  beacon: z.object({ round: z.int().min(1), signature: z.string(), randomness: hex32 }).nullable(),
  transcriptDigest: hex32,
  picks: paged(
    z.object({
      pick,
      award,
      leaf,
      label: z.string().nullable().describe('The words that announce the entrant; null where there are none.'),
      labelState: z.enum(['open', 'withheld', 'not-called']),
      ticketsIn: ticketsEach.describe('Tickets that the entrant had in at this pick.'),
      remaining: totalTickets.describe('All tickets in at this pick.'),
    }),
  ),
})

export const transcriptV1 = paged(
  z.object({
    pick,
    leaf,
    coins: z.array(
      z.object({
        left: totalTickets.describe('Tickets on the left, still in.'),
        right: totalTickets,
        flips: z.string().regex(/^[01]*$/),
        side: side.describe('H: the walk went left. T: right.'),
      }),
    ),
  }),
)

/** The members stand in the order of canonical JSON: the body of the answer is the short proof itself (section 10). */
export const inclusionV1 = z.object({
  entryCommit: hex32,
  format: z.literal('evenpenny/1'),
  kind: z.literal('inclusion'),
  leaf,
  path: z.array(z.object({ hash: hex32, side: z.enum(['L', 'R']), tickets: totalTickets })).max(21),
  seal: hex32,
  tickets: ticketsEach,
})

/** The names under which these shapes stand in the public description. */
export const v1Shapes = {
  Draw: drawV1,
  DrawDetail: drawDetailV1,
  Seal: sealV1,
  Result: resultV1,
  TranscriptPage: transcriptV1,
  InclusionProof: inclusionV1,
} as const

const bySlug = z.object({ slug })
const EXAMPLE_SLUG = DRAW_EXAMPLE.slug

export const listDrawsV1 = {
  name: 'listDrawsV1',
  method: 'GET',
  path: '/api/v1/draws',
  summary: 'List and search the public draws',
  description: 'The latest draw time first, 20 to a page. `q` looks in titles, good causes and names of organisations.',
  params: empty,
  query: z.object({
    q: z.string().max(100).default('').describe('Words to look for; all draws without it.'),
    state: z.union([state, z.literal('all')]).default('all'),
    page,
  }),
  body: empty,
  response: paged(drawV1),
  caching: 'revalidate',
  example: { params: {}, query: { q: 'shed', state: 'drawn', page: 1 }, response: LIST_EXAMPLE },
} as const satisfies PublicEndpoint

export const getDrawV1 = {
  name: 'getDrawV1',
  method: 'GET',
  path: '/api/v1/draws/:slug',
  summary: 'One draw in whatever state it is',
  description: 'With the digests that lead to its seal and result, and all that the log says of it.',
  params: bySlug,
  query: empty,
  body: empty,
  response: drawDetailV1,
  caching: 'revalidate',
  example: { params: { slug: EXAMPLE_SLUG }, query: {}, response: DRAW_EXAMPLE },
} as const satisfies PublicEndpoint

export const getSealInForceV1 = {
  name: 'getSealInForceV1',
  method: 'GET',
  path: '/api/v1/draws/:slug/seal',
  summary: 'The seal in force of a draw',
  description: 'A seal can be replaced until the draw. Ask for a seal by its digest to keep it for good.',
  params: bySlug,
  query: empty,
  body: empty,
  response: sealV1,
  caching: 'revalidate',
  example: { params: { slug: EXAMPLE_SLUG }, query: {}, response: SEAL_EXAMPLE },
} as const satisfies PublicEndpoint

export const getSealV1 = {
  name: 'getSealV1',
  method: 'GET',
  path: '/api/v1/seals/:seal',
  summary: 'A seal by its digest',
  description: 'Replaced seals too. The answer never changes.',
  params: z.object({ seal: hex32 }),
  query: empty,
  body: empty,
  response: sealV1,
  caching: 'immutable',
  example: { params: { seal: SEAL_EXAMPLE.digest }, query: {}, response: SEAL_EXAMPLE },
} as const satisfies PublicEndpoint

export const getInclusionV1 = {
  name: 'getInclusionV1',
  method: 'GET',
  path: '/api/v1/seals/:seal/leaves/:leaf',
  summary: 'The short proof that a leaf stands in a sealed list',
  description:
    'Tickets, commitment and path to the root; it names nobody. The body is the short proof of the record format, byte for byte: save it, and the check takes it.',
  params: z.object({ seal: hex32, leaf: z.coerce.number().int().min(0).max(1_999_999) }),
  query: empty,
  body: empty,
  response: inclusionV1,
  caching: 'immutable',
  example: {
    params: { seal: INCLUSION_EXAMPLE.seal, leaf: INCLUSION_EXAMPLE.leaf },
    query: {},
    response: INCLUSION_EXAMPLE,
  },
} as const satisfies PublicEndpoint

export const getResultV1 = {
  name: 'getResultV1',
  method: 'GET',
  path: '/api/v1/draws/:slug/result',
  summary: 'The result of a draw',
  description:
    'Its picks, 100 to a page, with the labels that are open today. A label can be taken down, so ask again before you show it.',
  params: bySlug,
  query: z.object({ page }),
  body: empty,
  response: resultV1,
  caching: 'revalidate',
  example: { params: { slug: EXAMPLE_SLUG }, query: { page: 1 }, response: RESULT_EXAMPLE },
} as const satisfies PublicEndpoint

export const listTranscriptV1 = {
  name: 'listTranscriptV1',
  method: 'GET',
  path: '/api/v1/draws/:slug/transcript',
  summary: 'Every coin of every pick',
  description: '100 picks to a page, in order. From the draw on, and then for good: the answer never changes.',
  params: bySlug,
  query: z.object({ page }),
  body: empty,
  response: transcriptV1,
  caching: 'immutable',
  example: { params: { slug: EXAMPLE_SLUG }, query: { page: 1 }, response: TRANSCRIPT_EXAMPLE },
} as const satisfies PublicEndpoint
