import type { Fraction } from '#shared/odds/fraction.ts'
import type { Chance, Odds, TicketOdds } from '#shared/odds/odds.ts'
import type { TicketList } from '#shared/odds/ticket-groups.ts'
import type { ChanceView, OddsView, TicketOddsView } from '#shared/schemas/api/odds.ts'

/** Exact chances with longer numbers say less than their decimals. */
const LONGEST = 10_000_000n

/** What leaves of a draw's odds: the rows of the chosen ticket counts, and of the one that was asked about. */
export function presentOdds(
  about: Omit<OddsView, 'state' | 'rows' | 'asked'>,
  odds: Odds | 'working' | 'unknown' | 'empty',
  rows: { readonly chosen: (list: TicketList) => readonly number[]; readonly asked: number | undefined } = {
    chosen: () => [],
    asked: undefined,
  },
): OddsView {
  if (typeof odds === 'string') return { ...about, state: odds, rows: [], asked: null }
  const joins = about.basis === 'joining' || about.basis === 'expected'
  const of = (tickets: number) => row(joins ? odds.joining(tickets) : odds.of(tickets))
  return {
    ...about,
    state: 'ready',
    rows: rows.chosen(odds.list).map(of),
    asked: rows.asked === undefined ? null : of(rows.asked),
  }
}

const row = ({ tickets, total, entrants, first, prize, pick }: TicketOdds): TicketOddsView => ({
  tickets,
  total,
  entrants,
  first: { over: Number(first.over), under: Number(first.under) },
  prize: view(prize),
  pick: view(pick),
})

const view = ({ decimal, exact }: Chance): ChanceView => ({ decimal, exact: exact === null ? null : short(exact) })

const short = ({ over, under }: Fraction) => (under < LONGEST ? { over: Number(over), under: Number(under) } : null)
