import { z } from 'zod'
import type { Endpoint } from '../endpoint.ts'
export { getDrawOdds } from './odds.ts'
export { getStatistics } from './statistics.ts'
import { drawState, empty, hex32, instant, money, page, paged, rule, slug, totalTickets } from '../values.ts'

/** One draw in a list. */
export const drawCard = z.object({
  slug,
  title: z.string(),
  organisation: z.object({ slug, name: z.string() }),
  goodCause: z.string(),
  state: drawState,
  demo: z.boolean(),
  timeZone: z.string(),
  closesAt: instant,
  drawAt: instant,
  drawnAt: instant.nullable(),
  entrants: z.int().nullable(),
  tickets: totalTickets.nullable(),
  prizes: z.int(),
  firstPrize: z.string().nullable(),
})
export type DrawCard = z.infer<typeof drawCard>

/** One coin of a walk, as the transcript has it: tickets left, tickets right, flips, side chosen. */
export const coin = z.tuple([z.int(), z.int(), z.string(), z.enum(['H', 'T'])])
export type CoinLine = z.infer<typeof coin>

export const award = z.union([
  z.object({
    kind: z.literal('prize'),
    prize: z.string(),
    name: z.string(),
    item: z.int(),
    of: z.int(),
    position: z.int(),
  }),
  z.object({ kind: z.literal('reserve'), reserve: z.int() }),
])
export type Award = z.infer<typeof award>

export const pickSummary = z.object({
  pick: z.int(),
  award,
  leaf: z.int(),
  /** The words that announce the entrant; null when withheld, or a reserve not yet called. */
  label: z.string().nullable(),
  labelState: z.enum(['open', 'withheld', 'not-called']),
  /** Tickets that the entrant had in at this pick, and all tickets then in. */
  ticketsIn: totalTickets,
  remaining: totalTickets,
  coins: z.array(coin),
})
export type PickSummary = z.infer<typeof pickSummary>

export const sealView = z.object({
  digest: hex32,
  sealedAt: instant,
  drawAt: instant,
  revealBy: instant.nullable(),
  root: hex32,
  entrants: z.int(),
  tickets: totalTickets,
  rule,
  reserves: z.int(),
  prizes: z.array(z.object({ id: z.string(), name: z.string(), quantity: z.int() })),
  beacon: z
    .object({ round: z.int(), at: instant, network: z.enum(['quicknet', 'development']), chain: hex32 })
    .nullable(),
  seedCommit: hex32.nullable(),
  keyFingerprint: hex32,
  supersedes: hex32.nullable(),
  reason: z.string().nullable(),
  /** When an outside authority saw the seal, by its own clock; null for seals from before the site asked for timestamps. */
  timestamp: z.object({ at: instant, authority: z.string() }).nullable(),
  /** How the list differs from that of the seal that this one replaces, in entrants. */
  changes: z.object({ added: z.int(), removed: z.int(), changed: z.int() }).nullable(),
})
export type SealView = z.infer<typeof sealView>

/** A line of a draw's public history: everything that happened, nothing taken away. */
export const historyEvent = z.object({
  index: z.int(),
  at: instant,
  event: z.string(),
  /** The public reason, where one was given and it has not been taken down. */
  note: z.string().nullable(),
  digest: hex32.nullable(),
})

export const witnessView = z.object({
  name: z.string(),
  role: z.string(),
  connection: z.string(),
  statements: z.array(
    z.object({
      about: z.enum(['seal', 'result']),
      verdict: z.enum(['confirmed', 'refused']),
      words: z.string().nullable(),
      at: instant,
      digest: hex32,
    }),
  ),
})

export const drawPage = z.object({
  slug,
  title: z.string(),
  goodCause: z.string(),
  organisation: z.object({ slug, name: z.string(), registration: z.string().nullable(), suspended: z.boolean() }),
  promoter: z.object({ name: z.string(), address: z.string() }),
  licence: z.string().nullable(),
  state: drawState,
  demo: z.boolean(),
  timeZone: z.string(),
  now: instant,
  terms: z.string(),
  ticketPrice: money.nullable(),
  minimumAge: z.int().nullable(),
  rule,
  reserves: z.int(),
  prizes: z.array(
    z.object({
      id: z.string(),
      name: z.string(),
      quantity: z.int(),
      donor: z.string().nullable(),
      description: z.string().nullable(),
      value: money.nullable(),
    }),
  ),
  openedAt: instant.nullable(),
  closesAt: instant,
  closedAt: instant.nullable(),
  drawAt: instant,
  drawnAt: instant.nullable(),
  witnesses: z.array(witnessView),
  /** The seal in force; replaced ones are in `replacedSeals`, oldest first. */
  seal: sealView.nullable(),
  replacedSeals: z.array(sealView),
  /** How many receipts of the seal in force were opened before the draw: a number, never whose. Null before the seal. */
  receiptsOpened: z.int().nullable(),
  /** What the settling waits for, while it waits: in words for the page. */
  waiting: z.object({ kind: z.enum(['beacon-not-yet', 'beacon-unreachable', 'settling']), since: instant }).nullable(),
  result: z
    .object({
      digest: hex32,
      drawnAt: instant,
      drawKey: hex32.nullable(),
      seed: hex32.nullable(),
      beacon: z.object({ round: z.int(), signature: z.string(), randomness: hex32 }).nullable(),
      transcriptDigest: hex32,
      picks: z.array(pickSummary),
      /** How many picks there were in all; `picks` holds the first 200. */
      pickCount: z.int(),
      flips: z.object({
        coins: z.int(),
        coinsWithFlips: z.int(),
        flips: z.int(),
        /** The exact expected number of flips of these coins, as a decimal rounded to two places. */
        expected: z.string(),
        /** How many coins took 1, 2, 3, … flips; `expected` to one decimal place for each. */
        histogram: z.array(z.object({ flips: z.int(), coins: z.int(), expected: z.string() })),
      }),
      archive: z.object({ bytes: z.int(), sha256: hex32 }).nullable(),
    })
    .nullable(),
  /** The sealed ticket counts for the chart: leaf order where there are at most 400, else counted by tickets held. */
  spread: z
    .union([
      z.object({ kind: z.literal('leaves'), tickets: z.array(z.int()), winners: z.array(z.int()) }),
      z.object({ kind: z.literal('counts'), counts: z.array(z.object({ tickets: z.int(), entrants: z.int() })) }),
    ])
    .nullable(),
  history: z.array(historyEvent),
})
export type DrawPage = z.infer<typeof drawPage>

export const pickPage = z.object({
  slug,
  title: z.string(),
  organisation: z.object({ slug, name: z.string() }),
  timeZone: z.string(),
  drawnAt: instant,
  demo: z.boolean(),
  sealDigest: hex32,
  drawKey: hex32.nullable(),
  pick: pickSummary,
  pickCount: z.int(),
  previous: z.object({ pick: z.int(), award }).nullable(),
  next: z.object({ pick: z.int(), award }).nullable(),
})
export type PickPage = z.infer<typeof pickPage>

export const organisationPage = z.object({
  slug,
  name: z.string(),
  registration: z.string().nullable(),
  about: z.string(),
  address: z.string(),
  demo: z.boolean(),
  suspended: z.boolean(),
  /** Since when it is suspended, and the site's public reason; null where it is not. */
  suspension: z.object({ at: instant, reason: z.string() }).nullable(),
  draws: z.array(drawCard),
})
export type OrganisationPage = z.infer<typeof organisationPage>

export const logPage = paged(
  z.object({
    index: z.int(),
    at: instant,
    event: z.string(),
    draw: z.object({ slug, title: z.string() }).nullable(),
    organisation: z.object({ slug, name: z.string() }).nullable(),
    note: z.string().nullable(),
    digest: hex32.nullable(),
  }),
)
export type LogPage = z.infer<typeof logPage>

export const getHome = {
  name: 'getHome',
  method: 'GET',
  path: '/api/home',
  summary: 'What is sealed, open and lately drawn',
  params: empty,
  query: empty,
  body: empty,
  response: z.object({ upcoming: z.array(drawCard), recent: z.array(drawCard), open: z.array(drawCard) }),
} as const satisfies Endpoint

export const searchDraws = {
  name: 'searchDraws',
  method: 'GET',
  path: '/api/draws',
  summary: 'Search the public draws',
  params: empty,
  query: z.object({
    q: z.string().max(100).default(''),
    state: z.union([drawState, z.literal('all')]).default('all'),
    page,
  }),
  body: empty,
  response: paged(drawCard),
} as const satisfies Endpoint

export const getDraw = {
  name: 'getDraw',
  method: 'GET',
  path: '/api/draws/:slug',
  summary: 'One draw in whatever state it is',
  params: z.object({ slug }),
  query: empty,
  body: empty,
  response: drawPage,
} as const satisfies Endpoint

export const getPick = {
  name: 'getPick',
  method: 'GET',
  path: '/api/draws/:slug/picks/:pick',
  summary: 'One walk, coin by coin',
  params: z.object({ slug, pick: z.coerce.number().int().min(0).max(99_999) }),
  query: empty,
  body: empty,
  response: pickPage,
} as const satisfies Endpoint

export const listOrganisations = {
  name: 'listOrganisations',
  method: 'GET',
  path: '/api/organisations',
  summary: 'The approved organisations',
  params: empty,
  query: z.object({ q: z.string().max(100).default(''), page }),
  body: empty,
  response: paged(
    z.object({
      slug,
      name: z.string(),
      about: z.string(),
      registration: z.string().nullable(),
      draws: z.int(),
      demo: z.boolean(),
      suspended: z.boolean(),
    }),
  ),
} as const satisfies Endpoint

export const getOrganisation = {
  name: 'getOrganisation',
  method: 'GET',
  path: '/api/organisations/:slug',
  summary: 'One organisation and its draws',
  params: z.object({ slug }),
  query: empty,
  body: empty,
  response: organisationPage,
} as const satisfies Endpoint

export const getLog = {
  name: 'getLog',
  method: 'GET',
  path: '/api/log',
  summary: 'Everything that happened to every draw, newest first',
  params: empty,
  /** `at` asks for the page on which an entry stands, in place of `page`. */
  query: z.object({ page, at: z.coerce.number().int().min(0).max(Number.MAX_SAFE_INTEGER).optional() }),
  body: empty,
  response: logPage,
} as const satisfies Endpoint
