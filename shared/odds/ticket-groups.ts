import { MAX_ENTRANTS, MAX_TICKETS, MAX_TICKETS_EACH } from '../protocol/limits.ts'

/** How many entrants of a list hold the same number of tickets. Entrants with as many tickets have the same odds. */
export interface TicketGroup {
  readonly tickets: number
  readonly entrants: number
}

/** A list as its odds see it: distinct ticket counts in rising order, and the two totals. */
export interface TicketList {
  readonly groups: readonly TicketGroup[]
  readonly entrants: number
  readonly tickets: number
}

/** Counts a list by tickets held. Throws a RangeError for what no list can hold (PROTOCOL "Limits"). */
export function listOfCounts(counts: Iterable<number>): TicketList {
  const held = new Map<number, number>()
  for (const tickets of counts) held.set(tickets, (held.get(tickets) ?? 0) + 1)
  return listOfGroups([...held].map(([tickets, entrants]) => ({ tickets, entrants })))
}

/** As {@link listOfCounts}, of groups in any order. A ticket count may stand in one group only. */
export function listOfGroups(groups: readonly TicketGroup[]): TicketList {
  const sorted = [...groups].sort((a, b) => a.tickets - b.tickets)
  let entrants = 0
  let tickets = 0
  for (const [index, group] of sorted.entries()) {
    if (!Number.isInteger(group.tickets) || group.tickets < 1 || group.tickets > MAX_TICKETS_EACH) {
      throw new RangeError(`nobody can hold ${group.tickets} tickets`)
    }
    if (!Number.isInteger(group.entrants) || group.entrants < 1) throw new RangeError('a group without entrants')
    if (sorted[index - 1]?.tickets === group.tickets) throw new RangeError('a ticket count in two groups')
    entrants += group.entrants
    tickets += group.tickets * group.entrants
  }
  if (entrants > MAX_ENTRANTS || tickets > MAX_TICKETS) throw new RangeError('more than a list can hold')
  return { groups: sorted, entrants, tickets }
}

/** The place of a ticket count in the list's groups, by bisection; -1 where nobody holds as many. */
export function groupOf({ groups }: Pick<TicketList, 'groups'>, tickets: number): number {
  let [low, high] = [0, groups.length - 1]
  while (low <= high) {
    const middle = (low + high) >> 1
    const held = (groups[middle] as TicketGroup).tickets
    if (held === tickets) return middle
    if (held < tickets) low = middle + 1
    else high = middle - 1
  }
  return -1
}
