import { type BenchClock, type BenchSection, measureLine, timed } from '#server/cli/bench/report.ts'
import { type OddsTerms, runOdds } from '#shared/odds/odds.ts'
import { listOfGroups, type TicketGroup, type TicketList } from '#shared/odds/ticket-groups.ts'

const PICKS = 100
/** "Within a few seconds". */
const GOAL = { kind: 'milliseconds', most: 3000 } as const

/** The odds of every entrant over all picks: the common case, other numbers of picks, and the worst list there can be. */
export function oddsSection(entrants: number, clock: BenchClock): BenchSection {
  return {
    name: 'odds',
    title: `Odds of every one of ${entrants} entrants`,
    run: async (print) => {
      const forty = groups(40, entrants)
      const measure = async (name: string, list: TicketList, terms: OddsTerms, goal?: typeof GOAL) => {
        const { milliseconds } = await timed(clock, () => {
          const odds = runOdds(list, terms)
          for (const { tickets } of list.groups) odds.of(tickets)
        })
        print(measureLine({ name, milliseconds, ...(goal ? { goal } : {}) }))
      }
      const each = (prizes: number): OddsTerms => ({ rule: 'one-prize-each', prizes, reserves: 0 })
      // The first run pays for the compiling.
      await timed(clock, () => runOdds(groups(7, 70), each(3)))
      await measure(`40 counts, ${PICKS} picks`, forty, each(PICKS), GOAL)
      await measure('with 900 reserves too', forty, { ...each(PICKS), reserves: 900 }, GOAL)
      await measure('every-ticket', forty, { rule: 'every-ticket', prizes: PICKS, reserves: 900 }, GOAL)
      if (entrants > 50_000) await measure('40 counts, 50,000 picks', forty, each(50_000))
      await measure('1,000 counts', groups(1000, entrants), each(PICKS), GOAL)
      if (entrants > 10_000) await measure('10,000 counts', groups(10_000, entrants), each(PICKS), GOAL)
      print('  The worst case: everybody holds a number of tickets that nobody else holds.')
      await measure(`${entrants} counts`, groups(entrants, entrants), each(PICKS))
    },
  }
}

/** So many different ticket counts, 1, 2, 3 …, over so many entrants. */
function groups(counts: number, entrants: number): TicketList {
  const each = Math.floor(entrants / counts)
  const list: TicketGroup[] = Array.from({ length: counts }, (_, i) => ({
    tickets: i + 1,
    entrants: each + (i < entrants - each * counts ? 1 : 0),
  }))
  return listOfGroups(list.filter((group) => group.entrants > 0))
}
