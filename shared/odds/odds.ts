import type { WalkRule } from '../sampling/walk.ts'
import { enumerateHypergeometric, enumerateSuccessive } from './enumerate.ts'
import { decimalOf, type Fraction, fractionOf } from './fraction.ts'
import { atLeastOne } from './hypergeometric.ts'
import { type SuccessiveChances, successiveChances } from './successive.ts'
import { groupOf, type TicketList } from './ticket-groups.ts'

/** A draw as its odds see it. `prizes` counts items to be won; the reserves are drawn after them. */
export interface OddsTerms {
  readonly rule: WalkRule
  readonly prizes: number
  readonly reserves: number
}

/** The chance of at least one of several picks. */
export interface Chance {
  /** To 9 significant digits: 0.245783955. 1 and 0 only where it is certain or impossible. */
  readonly decimal: string
  /** The exact chance, where the draw is small enough to go through everything that can happen. */
  readonly exact: Fraction | null
}

/** What a number of tickets gives its holder. */
export interface TicketOdds {
  readonly tickets: number
  /** How many entrants of the list hold as many. Where nobody does, the figures are those of one more entrant. */
  readonly entrants: number
  /** All tickets in: with their own, where it is one more entrant. */
  readonly total: number
  /** Tickets over all tickets in: the exact chance of the first pick, in lowest terms. */
  readonly first: Fraction
  /** At least one prize. */
  readonly prize: Chance
  /** At least one prize or place among the reserves. */
  readonly pick: Chance
}

/** The odds of a list: any number of tickets can be looked up at once. */
export interface Odds {
  readonly list: TicketList
  /** Of an entrant of the list with so many tickets; where nobody holds as many, as {@link joining}. */
  of(tickets: number): TicketOdds
  /** Of one more entrant with so many tickets. */
  joining(tickets: number): TicketOdds
}

const DIGITS = 9
/** Where the enumeration is worth its while: sets of entrants to go through, and factors of a binomial. */
const MOST_SETS = 600
/** Two sets at least for each group. */
const MOST_GROUPS = 10
const MOST_FACTORS = 60

/**
 * Works out the odds of a whole list (PROTOCOL section 7). `one-prize-each` is successive sampling, see
 * {@link successiveChances} for its method and cost; `every-ticket` is hypergeometric and is worked out when looked up.
 * Drive it to its end with {@link runOdds}, or step by step between other work.
 */
export function* oddsOf(list: TicketList, terms: OddsTerms): Generator<void, Odds> {
  if (list.entrants === 0) throw new RangeError('an empty list has no odds')
  const picks = terms.prizes + terms.reserves
  const successive = new Map<number, SuccessiveChances>()
  if (terms.rule === 'one-prize-each') {
    for (const count of new Set([terms.prizes, picks])) successive.set(count, yield* successiveChances(list, count))
  }
  const chance = (tickets: number, place: number, count: number): Chance => {
    const total = place < 0 ? list.tickets + tickets : list.tickets
    const run = successive.get(count)
    if (run === undefined) {
      return present(
        atLeastOne(total, tickets, count),
        count > total - tickets,
        enumerateHypergeometric(total, tickets, count, MOST_FACTORS),
      )
    }
    const entrants = place < 0 ? list.entrants : list.entrants - 1
    const value = place < 0 ? run.joining(tickets) : (run.held[place] as number)
    if (count > entrants || list.groups.length > MOST_GROUPS) return present(value, count > entrants, null)
    const others = { groups: place < 0 ? list.groups : without(list, place) }
    return present(value, false, enumerateSuccessive(others, tickets, count, MOST_SETS))
  }
  const at = (tickets: number, place: number): TicketOdds => {
    const total = place < 0 ? list.tickets + tickets : list.tickets
    const prize = chance(tickets, place, terms.prizes)
    return {
      tickets,
      total,
      entrants: list.groups[place]?.entrants ?? 0,
      first: fractionOf(tickets, total),
      prize,
      pick: terms.reserves === 0 ? prize : chance(tickets, place, picks),
    }
  }
  return { list, of: (tickets) => at(tickets, groupOf(list, tickets)), joining: (tickets) => at(tickets, -1) }
}

/** Drives {@link oddsOf} to its end without a pause. */
export function runOdds(list: TicketList, terms: OddsTerms): Odds {
  const run = oddsOf(list, terms)
  for (let step = run.next(); ; step = run.next()) if (step.done === true) return step.value
}

/** A chance below 1 never reads as certain: it has as many nines as there are digits. */
function present(value: number, certain: boolean, exact: Fraction | null): Chance {
  if (certain) return { decimal: '1', exact: { over: 1n, under: 1n } }
  if (exact !== null) return { decimal: below1(decimalOf(exact, DIGITS)), exact }
  if (value === 0) return { decimal: '0', exact: { over: 0n, under: 1n } }
  return { decimal: below1(plain(value)), exact: null }
}

const below1 = (decimal: string) => (decimal.startsWith('1') ? `0.${'9'.repeat(DIGITS)}` : decimal)

/** Without an exponent, as far as a double reaches. */
function plain(value: number): string {
  const text = value.toPrecision(DIGITS)
  if (!text.includes('e')) return text
  const [digits = '', exponent = ''] = text.split('e')
  return `0.${'0'.repeat(-Number(exponent) - 1)}${digits.replace('.', '')}`
}

/** The groups of a list without one entrant of the group at `place`. */
const without = (list: TicketList, place: number) =>
  list.groups.flatMap((group, index) => {
    if (index !== place) return [group]
    return group.entrants === 1 ? [] : [{ ...group, entrants: group.entrants - 1 }]
  })
