import { z } from 'zod'
import { ANNOUNCEMENTS } from '../../entrants/announcement.ts'
import type { Endpoint } from '../endpoint.ts'
export { getOfficeOdds } from './odds.ts'
import {
  drawState,
  email,
  empty,
  hex32,
  instant,
  line,
  localTime,
  money,
  optionalLine,
  page,
  paged,
  role,
  rule,
  slug,
  text,
  tickets,
  totalTickets,
  uuid,
} from '../values.ts'

const organisationParams = z.object({ organisation: slug })
const drawParams = z.object({ draw: uuid })
/** Optimistic lock: the version that the form was filled from; a later one is a 409 that says who changed it. */
const version = z.int().min(1)
const reason = text(500, 'Say why in a sentence: the public reads it.').describe('Public words')

export const officeDrawRow = z.object({
  id: uuid,
  slug,
  title: z.string(),
  state: drawState,
  demo: z.boolean(),
  closesAt: instant,
  drawAt: instant,
  entrants: z.int(),
  tickets: totalTickets,
  prizes: z.int(),
  /** What waits for somebody, in a sentence; null where nothing does. */
  waiting: z.string().nullable(),
})

export const prizeInput = z.object({
  /** Stable id of an existing prize; left out for a new one. */
  id: z
    .string()
    .regex(/^p[1-9][0-9]*$/)
    .optional(),
  name: line(120, 'Name the prize.'),
  quantity: z.int('Type a whole number.').min(1, 'Type at least 1.').max(100_000),
  donor: optionalLine(120),
  description: optionalLine(500),
  value: money.nullable(),
})
export type PrizeInput = z.infer<typeof prizeInput>

/** What an organiser types about a draw. Local times are in the organisation's time zone. */
export const drawInput = z.object({
  title: line(120, 'Give the draw a title.'),
  slug: slug.optional(),
  goodCause: line(200, 'Say what the proceeds are for.'),
  promoterName: line(120, 'Name the person who answers for the draw.'),
  promoterAddress: line(200, 'Give the address at which the promoter can be reached.'),
  licence: optionalLine(200),
  ticketPrice: money.nullable(),
  minimumAge: z.int().min(0).max(120).nullable(),
  terms: text(20_000, 'Write the terms: entrants read them before they pay.'),
  closesAt: localTime,
  drawAt: localTime,
  rule,
  reserves: z.int('Type a whole number.').min(0, 'Type 0 or more.').max(10_000),
})
export type DrawInput = z.infer<typeof drawInput>

export const mailCounts = z.object({ queued: z.int(), sent: z.int(), failed: z.int() })

/** Everything the office shows about one draw, except its entrants. */
export const officeDraw = z.object({
  id: uuid,
  version,
  slug,
  slugFixed: z.boolean(),
  title: z.string(),
  goodCause: z.string(),
  promoterName: z.string(),
  promoterAddress: z.string(),
  licence: z.string().nullable(),
  ticketPrice: money.nullable(),
  minimumAge: z.int().nullable(),
  terms: z.string(),
  closesAt: instant,
  drawAt: instant,
  closesAtLocal: localTime,
  drawAtLocal: localTime,
  timeZone: z.string(),
  rule,
  reserves: z.int(),
  state: drawState,
  demo: z.boolean(),
  now: instant,
  organisation: z.object({ slug, name: z.string(), state: z.string(), currency: z.string() }),
  prizes: z.array(prizeInput.extend({ id: z.string() })),
  counts: z.object({ entrants: z.int(), tickets: totalTickets, withEmail: z.int() }),
  openedAt: instant.nullable(),
  closedAt: instant.nullable(),
  sealedAt: instant.nullable(),
  drawnAt: instant.nullable(),
  sealDigest: hex32.nullable(),
  /** A seal that was made and waits for the timestamp from which on it counts: the first one, or one that replaces another. */
  sealing: z
    .object({
      replaces: hex32.nullable(),
      drawAt: instant,
      madeAt: instant,
      /** Tries that gave no timestamp, the last one, and what the authorities said. */
      tries: z.int(),
      triedAt: instant.nullable(),
      detail: z.string(),
      /** Without a timestamp by then the seal is discarded. */
      until: instant,
    })
    .nullable(),
  /** What a witness confirms after the draw. */
  resultDigest: hex32.nullable(),
  /** From the beacon's round on nobody can postpone, cancel or replace. */
  beaconRoundAt: instant.nullable(),
  witnesses: z.array(
    z.object({
      id: uuid,
      person: z.object({ id: uuid, name: z.string() }).nullable(),
      name: z.string(),
      role: z.string(),
      connection: z.string(),
    }),
  ),
  statements: z.array(
    z.object({
      witness: z.string(),
      about: z.enum(['seal', 'result']),
      verdict: z.enum(['confirmed', 'refused']),
      words: z.string().nullable(),
      at: instant,
    }),
  ),
  /** What the signed-in person may do now, decided by the same module that decides the routes. */
  may: z.object({
    edit: z.boolean(),
    changeEntrants: z.boolean(),
    open: z.boolean(),
    close: z.boolean(),
    reopen: z.boolean(),
    seal: z.boolean(),
    replaceSeal: z.boolean(),
    postpone: z.boolean(),
    cancel: z.boolean(),
    state: z.boolean(),
  }),
  /** What stands in the way of opening and of sealing: sentences that say what to do. */
  problems: z.object({ open: z.array(z.string()), seal: z.array(z.string()) }),
  mail: z.object({ entry: mailCounts, seal: mailCounts, result: mailCounts, notice: mailCounts }),
  jobs: z.array(
    z.object({
      id: z.string(),
      kind: z.string(),
      state: z.enum(['waiting', 'running', 'done', 'failed', 'cancelled']),
      at: instant,
      tries: z.int(),
      error: z.string().nullable(),
    }),
  ),
  archive: z
    .object({
      key: z.string(),
      bytes: z.int(),
      sha256: hex32,
      lockedUntil: instant.nullable(),
      verifiedAt: instant.nullable(),
    })
    .nullable(),
})
export type OfficeDraw = z.infer<typeof officeDraw>

export const listOfficeDraws = {
  name: 'listOfficeDraws',
  method: 'GET',
  path: '/api/office/organisations/:organisation/draws',
  summary: "An organisation's draws",
  params: organisationParams,
  query: empty,
  body: empty,
  response: z.object({
    organisation: z.object({
      slug,
      name: z.string(),
      state: z.string(),
      timeZone: z.string(),
      currency: z.string(),
      address: z.string(),
      registration: z.string().nullable(),
    }),
    draws: z.array(officeDrawRow),
  }),
} as const satisfies Endpoint
export const createDraw = {
  name: 'createDraw',
  method: 'POST',
  path: '/api/office/organisations/:organisation/draws',
  summary: 'Make a draft',
  params: organisationParams,
  query: empty,
  body: drawInput,
  response: officeDraw,
} as const satisfies Endpoint
export const getOfficeDraw = {
  name: 'getOfficeDraw',
  method: 'GET',
  path: '/api/office/draws/:draw',
  summary: 'One draw as the office sees it',
  params: drawParams,
  query: empty,
  body: empty,
  response: officeDraw,
} as const satisfies Endpoint
export const updateDraw = {
  name: 'updateDraw',
  method: 'PATCH',
  path: '/api/office/draws/:draw',
  summary: 'Change a draft',
  params: drawParams,
  query: empty,
  body: drawInput.extend({ version }),
  response: officeDraw,
} as const satisfies Endpoint
export const putPrizes = {
  name: 'putPrizes',
  method: 'PUT',
  path: '/api/office/draws/:draw/prizes',
  summary: 'Set the prizes, in the order in which they are drawn',
  params: drawParams,
  query: empty,
  body: z.object({ version, prizes: z.array(prizeInput).max(1000) }),
  response: officeDraw,
} as const satisfies Endpoint
export const openDraw = {
  name: 'openDraw',
  method: 'POST',
  path: '/api/office/draws/:draw/open',
  summary: 'Publish the terms and open for entries',
  params: drawParams,
  query: empty,
  body: z.object({ version }),
  response: officeDraw,
} as const satisfies Endpoint
export const closeDraw = {
  name: 'closeDraw',
  method: 'POST',
  path: '/api/office/draws/:draw/close',
  summary: 'Close the list now',
  params: drawParams,
  query: empty,
  body: z.object({ version }),
  response: officeDraw,
} as const satisfies Endpoint
export const reopenDraw = {
  name: 'reopenDraw',
  method: 'POST',
  path: '/api/office/draws/:draw/reopen',
  summary: 'Reopen a closed list, with a public reason',
  params: drawParams,
  query: empty,
  body: z.object({ version, reason, closesAt: localTime }),
  response: officeDraw,
} as const satisfies Endpoint
export const getSealSummary = {
  name: 'getSealSummary',
  method: 'GET',
  path: '/api/office/draws/:draw/seal',
  summary: 'What a seal would fix, before it is confirmed',
  params: drawParams,
  query: empty,
  body: empty,
  response: z.object({
    entrants: z.int(),
    tickets: totalTickets,
    withoutEmail: z.int(),
    prizes: z.array(z.object({ id: z.string(), name: z.string(), quantity: z.int() })),
    items: z.int(),
    reserves: z.int(),
    rule,
    drawAt: instant,
    beacon: z.object({ round: z.int(), at: instant, network: z.enum(['quicknet', 'development']) }),
    keyFingerprint: hex32,
    termsDigest: hex32,
    problems: z.array(z.string()),
    cautions: z.array(z.string()),
    replaces: hex32.nullable(),
  }),
} as const satisfies Endpoint
/** `entrants` and `tickets` are what the promoter saw: the seal is refused if the list differs by now. */
export const sealDraw = {
  name: 'sealDraw',
  method: 'POST',
  path: '/api/office/draws/:draw/seal',
  summary: 'Seal the closed list',
  params: drawParams,
  query: empty,
  body: z.object({
    version,
    entrants: z.int().min(1),
    tickets: totalTickets,
    confirmed: z.literal(true, 'Tick the box to confirm what the seal fixes.'),
  }),
  response: officeDraw,
} as const satisfies Endpoint
/** Before the seal: changes the dates. After it: makes a new seal that replaces the one in force. */
export const postponeDraw = {
  name: 'postponeDraw',
  method: 'POST',
  path: '/api/office/draws/:draw/postpone',
  summary: 'Postpone, with a public reason',
  params: drawParams,
  query: empty,
  body: z.object({ version, reason, closesAt: localTime.optional(), drawAt: localTime }),
  response: officeDraw,
} as const satisfies Endpoint
export const cancelDraw = {
  name: 'cancelDraw',
  method: 'POST',
  path: '/api/office/draws/:draw/cancel',
  summary: 'Cancel for good, with a public reason',
  params: drawParams,
  query: empty,
  body: z.object({ version, reason, title: z.string() }),
  response: officeDraw,
} as const satisfies Endpoint

export const entrantRow = z.object({
  id: z.string(),
  code: z.string(),
  name: z.string(),
  label: z.string(),
  tickets,
  email: z.string().nullable(),
  phone: z.string().nullable(),
  numbers: z.string().nullable(),
  source: z.string(),
  addedAt: instant,
  /** The entrant's own choice on their private page; the label that counts follows it. */
  announced: z.enum(ANNOUNCEMENTS),
  version,
})
export type EntrantRow = z.infer<typeof entrantRow>
export const entrantInput = z.object({
  name: line(200, 'Type the name.'),
  tickets,
  label: optionalLine(200),
  email: z.union([z.literal('').transform(() => null), z.null(), email]),
  phone: optionalLine(40),
  numbers: optionalLine(200),
})
export const entrantSort = z.enum(['added', 'name', 'label', 'tickets', 'code'])
export const listEntrants = {
  name: 'listEntrants',
  method: 'GET',
  path: '/api/office/draws/:draw/entrants',
  summary: 'Entrants, searched, sorted and paged',
  params: drawParams,
  query: z.object({
    q: z.string().max(100).default(''),
    sort: entrantSort.default('added'),
    direction: z.enum(['up', 'down']).default('up'),
    page,
  }),
  body: empty,
  response: paged(entrantRow).extend({ tickets: totalTickets }),
} as const satisfies Endpoint
export const addEntrant = {
  name: 'addEntrant',
  method: 'POST',
  path: '/api/office/draws/:draw/entrants',
  summary: 'Add an entrant by hand',
  params: drawParams,
  query: empty,
  body: entrantInput,
  response: entrantRow,
} as const satisfies Endpoint
export const updateEntrant = {
  name: 'updateEntrant',
  method: 'PATCH',
  path: '/api/office/draws/:draw/entrants/:entrant',
  summary: 'Change an entrant',
  params: drawParams.extend({ entrant: z.string().regex(/^\d{1,18}$/) }),
  query: empty,
  body: entrantInput.extend({ version }),
  response: entrantRow,
} as const satisfies Endpoint
export const removeEntrant = {
  name: 'removeEntrant',
  method: 'DELETE',
  path: '/api/office/draws/:draw/entrants/:entrant',
  summary: 'Take an entrant out of the list before it is sealed',
  params: drawParams.extend({ entrant: z.string().regex(/^\d{1,18}$/) }),
  query: empty,
  body: z.object({ reason: text(300, 'Say why this entrant leaves the list.') }),
  response: empty,
} as const satisfies Endpoint

/** The CSV itself is uploaded as multipart/form-data (field `file`) to POST /api/office/draws/:draw/imports, which answers with this. */
export const importView = z.object({
  id: uuid,
  fileName: z.string(),
  state: z.enum(['reading', 'ready', 'faulty', 'applying', 'applied', 'discarded', 'failed']),
  bytesRead: z.int(),
  bytesTotal: z.int(),
  rows: z.int(),
  entrants: z.int(),
  tickets: totalTickets,
  errorCount: z.int(),
  /** The first 200 errors, by row of the file (the header is row 1). */
  errors: z.array(z.object({ row: z.int(), column: z.string().nullable(), message: z.string() })),
  /** Columns found that are not used. */
  ignoredColumns: z.array(z.string()),
  preview: z.array(
    z.object({
      row: z.int(),
      name: z.string(),
      tickets,
      label: z.string(),
      email: z.string().nullable(),
      phone: z.string().nullable(),
      numbers: z.string().nullable(),
    }),
  ),
  failure: z.string().nullable(),
  createdAt: instant,
  createdBy: z.string(),
})
export type ImportView = z.infer<typeof importView>
const importParams = drawParams.extend({ import: uuid })
export const uploadImport = {
  name: 'uploadImport',
  method: 'POST',
  path: '/api/office/draws/:draw/imports',
  summary:
    'Upload a CSV of entrants (multipart/form-data, field "file"): read and checked, nothing stored in the list yet',
  params: drawParams,
  query: empty,
  body: z.unknown(),
  response: importView,
} as const satisfies Endpoint
export const getImport = {
  name: 'getImport',
  method: 'GET',
  path: '/api/office/draws/:draw/imports/:import',
  summary: 'How far an import is, and what it found',
  params: importParams,
  query: empty,
  body: empty,
  response: importView,
} as const satisfies Endpoint
export const applyImport = {
  name: 'applyImport',
  method: 'POST',
  path: '/api/office/draws/:draw/imports/:import/apply',
  summary: 'Bring every row of a faultless import into the list, or none',
  params: importParams,
  query: empty,
  body: empty,
  response: importView,
} as const satisfies Endpoint
export const discardImport = {
  name: 'discardImport',
  method: 'POST',
  path: '/api/office/draws/:draw/imports/:import/discard',
  summary: 'Throw an import away',
  params: importParams,
  query: empty,
  body: empty,
  response: importView,
} as const satisfies Endpoint
export const listImports = {
  name: 'listImports',
  method: 'GET',
  path: '/api/office/draws/:draw/imports',
  summary: 'Imports of a draw, newest first',
  params: drawParams,
  query: empty,
  body: empty,
  response: z.array(importView.omit({ errors: true, preview: true })),
} as const satisfies Endpoint

export const nameWitness = {
  name: 'nameWitness',
  method: 'POST',
  path: '/api/office/draws/:draw/witnesses',
  summary: 'Name a witness, before the draw',
  params: drawParams,
  query: empty,
  body: z.object({
    name: line(100, 'Name the witness.'),
    role: line(100, 'Say who they are, for example trustee of another group.'),
    connection: line(200, 'Say how they are connected with the organisation, or that they are not.'),
    person: uuid.nullable(),
  }),
  response: officeDraw,
} as const satisfies Endpoint
export const removeWitness = {
  name: 'removeWitness',
  method: 'DELETE',
  path: '/api/office/draws/:draw/witnesses/:witness',
  summary: 'Take a witness off, before they have said anything',
  params: drawParams.extend({ witness: uuid }),
  query: empty,
  body: empty,
  response: officeDraw,
} as const satisfies Endpoint
/** A witness confirms what they saw, or refuses with words that the public reads. It never stops or repeats a draw. */
export const stateAsWitness = {
  name: 'stateAsWitness',
  method: 'POST',
  path: '/api/office/draws/:draw/statements',
  summary: 'Confirm or refuse the seal or the result, as its witness',
  params: drawParams,
  query: empty,
  body: z.object({
    about: z.enum(['seal', 'result']),
    digest: hex32,
    verdict: z.enum(['confirmed', 'refused']),
    words: optionalLine(500),
  }),
  response: officeDraw,
} as const satisfies Endpoint

export const auditEntry = z.object({
  id: z.string(),
  at: instant,
  actor: z.string().nullable(),
  action: z.string(),
  draw: z.object({ id: uuid, title: z.string() }).nullable(),
  organisation: z.string().nullable(),
  sentence: z.string(),
  before: z.unknown(),
  after: z.unknown(),
})
export const getDrawAudit = {
  name: 'getDrawAudit',
  method: 'GET',
  path: '/api/office/draws/:draw/audit',
  summary: 'Who changed what in this draw',
  params: drawParams,
  query: z.object({ q: z.string().max(100).default(''), page }),
  body: empty,
  response: paged(auditEntry),
} as const satisfies Endpoint

export const personRow = z.object({ id: uuid, name: z.string(), email: z.string(), role, since: instant })
export const invitationRow = z.object({
  id: uuid,
  email: z.string(),
  role,
  invitedBy: z.string(),
  sentAt: instant,
  expiresAt: instant,
})
export const listPeople = {
  name: 'listPeople',
  method: 'GET',
  path: '/api/office/organisations/:organisation/people',
  summary: "An organisation's people and open invitations",
  params: organisationParams,
  query: empty,
  body: empty,
  response: z.object({
    organisation: z.object({ slug, name: z.string() }),
    people: z.array(personRow),
    invitations: z.array(invitationRow),
    may: z.object({ change: z.boolean() }),
  }),
} as const satisfies Endpoint
export const invitePerson = {
  name: 'invitePerson',
  method: 'POST',
  path: '/api/office/organisations/:organisation/invitations',
  summary: 'Invite a person by mail',
  params: organisationParams,
  query: empty,
  body: z.object({ email, role }),
  response: invitationRow,
} as const satisfies Endpoint
export const revokeInvitation = {
  name: 'revokeInvitation',
  method: 'DELETE',
  path: '/api/office/organisations/:organisation/invitations/:invitation',
  summary: 'Take back an invitation',
  params: organisationParams.extend({ invitation: uuid }),
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint
export const removePerson = {
  name: 'removePerson',
  method: 'DELETE',
  path: '/api/office/organisations/:organisation/people/:person',
  summary: "Take away a person's role; their sessions end at once",
  params: organisationParams.extend({ person: uuid }),
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint
