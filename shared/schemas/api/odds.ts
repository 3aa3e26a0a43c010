import { z } from 'zod'
import { MAX_ENTRANTS, MAX_PICKS, MAX_TICKETS_EACH } from '../../protocol/limits.ts'
import type { Endpoint } from '../endpoint.ts'
import { empty, rule, slug, totalTickets, uuid } from '../values.ts'

/** A chance in lowest terms. */
const fraction = z.object({ over: totalTickets, under: totalTickets })

/** The chance of at least one of several picks. */
export const chance = z.object({
  /** To 9 significant digits, such as 0.245783955; 1 only where it is certain. */
  decimal: z.string().regex(/^(?:[01]|0\.\d+)$/),
  /** The exact chance, where it is known and short. */
  exact: fraction.nullable(),
})
export type ChanceView = z.infer<typeof chance>

/** What a number of tickets gives its holder. */
export const ticketOdds = z.object({
  tickets: z.int().min(1),
  /** All tickets in. Where nobody holds as many, those of one more entrant are counted with them. */
  total: totalTickets,
  /** How many entrants hold as many. With none the figures are those of one more entrant. */
  entrants: z.int().min(0),
  first: fraction,
  /** At least one prize. */
  prize: chance,
  /** At least one prize or place among the reserves. */
  pick: chance,
})
export type TicketOddsView = z.infer<typeof ticketOdds>

/** What some numbers of tickets give in a draw. */
export const oddsView = z.object({
  /**
   * Of the sealed list, of the list as it stands now, of one more entrant beside the list as it stands now, or beside a
   * list that somebody expects.
   */
  basis: z.enum(['sealed', 'present', 'joining', 'expected']),
  /**
   * `working` while a list with very many different ticket counts is being worked out, `unknown` where that is left to
   * the seal, `empty` where there is no ticket or no prize yet: no rows then.
   */
  state: z.enum(['ready', 'working', 'unknown', 'empty']),
  entrants: z.int(),
  tickets: totalTickets,
  rule,
  /** Items to be won. */
  prizes: z.int(),
  reserves: z.int(),
  rows: z.array(ticketOdds),
  /** For the number of tickets that was asked about. */
  asked: ticketOdds.nullable(),
})
export type OddsView = z.infer<typeof oddsView>

const ticketsAsked = z.coerce.number().int().min(1).max(MAX_TICKETS_EACH).optional()

export const getDrawOdds = {
  name: 'getDrawOdds',
  method: 'GET',
  path: '/api/draws/:slug/odds',
  summary: 'What numbers of tickets give: in the sealed list, or before the closing beside the list as it stands',
  params: z.object({ slug }),
  query: z.object({ tickets: ticketsAsked }),
  body: empty,
  response: oddsView,
} as const satisfies Endpoint

export const getOfficeOdds = {
  name: 'getOfficeOdds',
  method: 'GET',
  path: '/api/office/draws/:draw/odds',
  summary: 'What numbers of tickets give with the present list, or with the list and the prizes that are expected',
  params: z.object({ draw: uuid }),
  query: z.object({
    tickets: ticketsAsked,
    /** Items to be won, in place of those that are saved. */
    prizes: z.coerce.number().int().min(1).max(MAX_PICKS).optional(),
    /** An expected list in place of the present one: so many entrants, with so many tickets together, spread evenly. */
    entrants: z.coerce.number().int().min(1).max(MAX_ENTRANTS).optional(),
    allTickets: z.coerce.number().int().min(1).max(1_000_000_000).optional(),
  }),
  body: empty,
  response: oddsView,
} as const satisfies Endpoint
