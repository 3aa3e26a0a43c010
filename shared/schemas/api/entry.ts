import { z } from 'zod'
import { ANNOUNCEMENTS } from '../../entrants/announcement.ts'
import type { Endpoint } from '../endpoint.ts'
import {
  drawState,
  email,
  empty,
  hex32,
  instant,
  page,
  paged,
  rule,
  slug,
  text,
  tickets,
  totalTickets,
  uuid,
} from '../values.ts'
import { award, coin } from './public.ts'

/** An entrant's private page and what belongs to it, for the entrant and in the office. */

/** A private link's token, or the code of a printed slip as it is typed. */
const access = z.object({ token: z.string().min(1).max(100) })
const announcement = z.enum(ANNOUNCEMENTS)

export const correctionView = z.object({
  id: z.string(),
  words: z.string(),
  askedAt: instant,
  afterSeal: z.boolean(),
  state: z.enum(['open', 'done', 'refused']),
  answer: z.string().nullable(),
  answeredAt: instant.nullable(),
})
export type CorrectionView = z.infer<typeof correctionView>

/** An entrant's own entry. Before the seal as the list has it, from the seal on as it was sealed. */
export const entryView = z.object({
  draw: z.object({
    slug,
    title: z.string(),
    goodCause: z.string(),
    organisation: z.object({ slug, name: z.string(), suspended: z.boolean() }),
    promoter: z.object({ name: z.string(), address: z.string() }),
    licence: z.string().nullable(),
    state: drawState,
    demo: z.boolean(),
    timeZone: z.string(),
    now: instant,
    closesAt: instant,
    drawAt: instant,
    drawnAt: instant.nullable(),
    rule,
    terms: z.string(),
    /** All entrants and tickets: of the seal in force, before that of the list. */
    entrants: z.int(),
    tickets: totalTickets,
  }),
  name: z.string(),
  label: z.string(),
  code: z.string(),
  tickets,
  numbers: z.string().nullable(),
  contact: z.string().nullable(),
  announcement: z.object({
    choice: announcement,
    /** The words of each choice. */
    words: z.object({ label: z.string(), initials: z.string(), code: z.string() }),
    open: z.boolean(),
  }),
  corrections: z.object({
    items: z.array(correctionView),
    /** Why nothing can be asked for now; null where it can. */
    refusal: z.string().nullable(),
  }),
  sealed: z
    .object({
      digest: hex32,
      sealedAt: instant,
      leaf: z.int(),
      keyFingerprint: hex32,
      /** JCS text of the receipt (PROTOCOL section 10); null once the key that it is made with was destroyed. */
      receipt: z.string().nullable(),
      /** Seals that were replaced, oldest first: their receipts no longer count. */
      replaced: z.array(z.object({ digest: hex32, sealedAt: instant, reason: z.string().nullable() })),
    })
    .nullable(),
  result: z
    .object({
      pickCount: z.int(),
      /** Every pick that came to this entrant, reserves included, in order. */
      won: z.array(z.object({ pick: z.int(), award })),
    })
    .nullable(),
})
export type EntryView = z.infer<typeof entryView>

/** One pick as one entrant sees it: how many tickets they had in of how many, and how far the walk came with them. */
export const entryPick = z.object({
  pick: z.int(),
  award,
  /** Their tickets in, and all tickets in, before this pick: their exact chance. */
  mine: totalTickets,
  remaining: totalTickets,
  coins: z.int(),
  /** The coin, from 1, that went the other way; null where the pick came to them. */
  turnedAt: z.int().nullable(),
})
export type EntryPick = z.infer<typeof entryPick>

/** The coins of one pick up to the one that turned away, each with the entrant's place in it. */
export const entryWalk = entryPick.extend({
  walk: z.array(z.object({ coin, mine: totalTickets, total: totalTickets, before: totalTickets, kept: z.boolean() })),
  /** The tickets and the words of the entrant to whom the walk came; words null where they are not public. */
  winner: z.object({ tickets: totalTickets, label: z.string().nullable() }),
})
export type EntryWalk = z.infer<typeof entryWalk>

export const getEntry = {
  name: 'getEntry',
  method: 'GET',
  path: '/api/entry/:token',
  summary: "An entrant's own entry, by their private link or code",
  params: access,
  query: empty,
  body: empty,
  response: entryView,
} as const satisfies Endpoint

export const getEntryPicks = {
  name: 'getEntryPicks',
  method: 'GET',
  path: '/api/entry/:token/picks',
  summary: 'What happened to this entrant at each pick',
  params: access,
  query: z.object({ page }),
  body: empty,
  response: paged(entryPick),
} as const satisfies Endpoint

export const getEntryWalk = {
  name: 'getEntryWalk',
  method: 'GET',
  path: '/api/entry/:token/picks/:pick',
  summary: "One walk along this entrant's branch, coin by coin",
  params: access.extend({ pick: z.coerce.number().int().min(0).max(99_999) }),
  query: empty,
  body: empty,
  response: entryWalk,
} as const satisfies Endpoint

export const chooseAnnouncement = {
  name: 'chooseAnnouncement',
  method: 'PUT',
  path: '/api/entry/:token/announcement',
  summary: 'Choose how to be announced, until the list is closed',
  params: access,
  query: empty,
  body: z.object({ choice: announcement }),
  response: entryView,
} as const satisfies Endpoint

export const askCorrection = {
  name: 'askCorrection',
  method: 'POST',
  path: '/api/entry/:token/corrections',
  summary: 'Ask for a correction, until the draw time',
  params: access,
  query: empty,
  body: z.object({ words: text(1000, 'Say what is wrong, and what it should be.') }),
  response: entryView,
} as const satisfies Endpoint

/** Sent by the page once the receipt was checked in the browser. Only the number of openings is ever shown. */
export const noteReceiptOpened = {
  name: 'noteReceiptOpened',
  method: 'POST',
  path: '/api/entry/:token/openings',
  summary: 'Count this receipt among those opened before the draw',
  params: access,
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint

export const openEntry = {
  name: 'openEntry',
  method: 'POST',
  path: '/api/entry-codes',
  summary: 'Try the code of a printed slip',
  params: empty,
  query: empty,
  body: z.object({
    code: z.string().trim().min(1, 'Type the code from your slip.').max(100, 'A code has 16 letters.'),
  }),
  /** The code as an address wants it. */
  response: z.object({ code: z.string() }),
} as const satisfies Endpoint

export const requestEntryLink = {
  name: 'requestEntryLink',
  method: 'POST',
  path: '/api/entry-links',
  summary: 'Have the private links of an e-mail address sent again; the answer is always the same',
  params: empty,
  query: empty,
  body: z.object({ email }),
  response: empty,
} as const satisfies Endpoint

const drawParams = z.object({ draw: uuid })
const entrantParams = drawParams.extend({ entrant: z.string().regex(/^\d{1,18}$/) })

export const sendEntryLink = {
  name: 'sendEntryLink',
  method: 'POST',
  path: '/api/office/draws/:draw/entrants/:entrant/link',
  summary: 'Mail an entrant their private link again',
  params: entrantParams,
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint

/** Slips are made in batches of at most so many. */
export const SLIPS_AT_ONCE = 400

export const slipView = z.object({
  entrant: z.string(),
  name: z.string(),
  tickets,
  numbers: z.string().nullable(),
  /** 16 letters; shown this once, kept only as a keyed hash. */
  code: z.string(),
  /** The address with the code, as the dark modules of a QR code in a square of `side` units. */
  qr: z.object({ side: z.int(), path: z.string() }),
})
export type SlipView = z.infer<typeof slipView>

export const printSlips = {
  name: 'printSlips',
  method: 'POST',
  path: '/api/office/draws/:draw/slips',
  summary: 'Make new codes for printed slips',
  params: drawParams,
  query: empty,
  body: z.object({
    who: z.enum(['without-email', 'everybody']).or(z.object({ entrant: z.string().regex(/^\d{1,18}$/) })),
    /** The last entrant of the batch before; null for the first batch. */
    after: z
      .string()
      .regex(/^\d{1,18}$/)
      .nullable(),
  }),
  response: z.object({ slips: z.array(slipView), more: z.boolean() }),
} as const satisfies Endpoint

export const officeCorrection = correctionView.extend({
  entrant: z.object({ id: z.string(), code: z.string(), name: z.string() }),
  answeredBy: z.string().nullable(),
  /** Whether whoever asks may answer it. */
  mayAnswer: z.boolean(),
})
export type OfficeCorrection = z.infer<typeof officeCorrection>

export const listCorrections = {
  name: 'listCorrections',
  method: 'GET',
  path: '/api/office/draws/:draw/corrections',
  summary: 'Corrections that entrants ask for, open ones first',
  params: drawParams,
  query: z.object({ page }),
  body: empty,
  response: paged(officeCorrection).extend({ open: z.int() }),
} as const satisfies Endpoint

export const answerCorrection = {
  name: 'answerCorrection',
  method: 'POST',
  path: '/api/office/draws/:draw/corrections/:correction',
  summary: 'Answer a correction: done or refused, with words that go to the entrant',
  params: drawParams.extend({ correction: z.string().regex(/^\d{1,18}$/) }),
  query: empty,
  body: z.object({
    verdict: z.enum(['done', 'refused'], 'Say whether it was done or refused.'),
    words: text(1000, 'Write what the entrant is told.'),
  }),
  response: empty,
} as const satisfies Endpoint
