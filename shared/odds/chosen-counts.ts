import type { TicketList } from './ticket-groups.ts'

/** So many different counts are shown one by one. */
const ALL = 8

/**
 * The ticket counts that a table of odds shows, in rising order: all that somebody holds where there are at most eight
 * of them, else the counts held next below 1, 2, 5, 10, 20, 50 …, and the largest. At most eight of these, the widest
 * apart; a list that somebody prints stays short.
 */
export function chosenCounts({ groups }: Pick<TicketList, 'groups'>): readonly number[] {
  const held = groups.map(({ tickets }) => tickets)
  if (held.length <= ALL) return held
  const chosen = new Set<number>()
  let place = 0
  for (const step of steps(held.at(-1) as number)) {
    while (place + 1 < held.length && (held[place + 1] as number) <= step) place += 1
    if ((held[place] as number) <= step) chosen.add(held[place] as number)
  }
  chosen.add(held[0] as number)
  chosen.add(held.at(-1) as number)
  const all = [...chosen].sort((a, b) => a - b)
  if (all.length <= ALL) return all
  return Array.from({ length: ALL }, (_, i) => all[Math.round((i * (all.length - 1)) / (ALL - 1))] as number)
}

/** 1, 2, 5, 10, 20, 50 … up to `most`. */
function* steps(most: number): Generator<number> {
  for (let ten = 1; ten <= most; ten *= 10) {
    for (const step of [ten, 2 * ten, 5 * ten]) if (step <= most) yield step
  }
}
