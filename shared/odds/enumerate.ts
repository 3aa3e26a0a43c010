import { add, complement, type Fraction, fractionOf, multiply } from './fraction.ts'
import type { TicketList } from './ticket-groups.ts'

/**
 * The exact chance of an entrant with `tickets` tickets to be among the first `picks` of a `one-prize-each` draw, by
 * going through everything that can happen to the `others`: pick after pick the chance that it falls on none of this
 * entrant's tickets, over all sets of entrants that may have left. Entrants with as many tickets are told apart only by
 * how many of them have left, so there are at most the product of (entrants + 1) sets. Returns null where there are more
 * than `mostSets`.
 */
export function enumerateSuccessive(
  others: Pick<TicketList, 'groups'>,
  tickets: number,
  picks: number,
  mostSets = 5000,
): Fraction | null {
  const { groups } = others
  let sets = 1
  for (const { entrants } of groups) {
    sets *= Math.min(entrants, picks) + 1
    if (sets > mostSets) return null
  }
  const known = new Map<string, Fraction>()
  /** The chance of being missed by all picks still to come, `left` of each group being still in. */
  const missed = (left: readonly number[], toCome: number): Fraction => {
    if (toCome === 0) return { over: 1n, under: 1n }
    // The others who left tell how many picks are over, so they alone name the set.
    const key = left.join()
    const before = known.get(key)
    if (before) return before
    const total = groups.reduce((sum, group, index) => sum + group.tickets * (left[index] as number), tickets)
    let chance: Fraction = { over: 0n, under: 1n }
    for (const [index, group] of groups.entries()) {
      const count = left[index] as number
      if (count === 0) continue
      const after = left.map((other, place) => (place === index ? other - 1 : other))
      chance = add(chance, multiply(fractionOf(group.tickets * count, total), missed(after, toCome - 1)))
    }
    known.set(key, chance)
    return chance
  }
  return complement(
    missed(
      groups.map(({ entrants }) => entrants),
      picks,
    ),
  )
}

/**
 * The exact chance that at least one of `tickets` of `total` tickets is among `picks` drawn without replacement
 * (hypergeometric), for an `every-ticket` draw. Null where it would take more than `mostFactors` factors.
 */
export function enumerateHypergeometric(
  total: number,
  tickets: number,
  picks: number,
  mostFactors = 500,
): Fraction | null {
  if (picks > total - tickets) return { over: 1n, under: 1n }
  const [few, many] = picks < tickets ? [picks, tickets] : [tickets, picks]
  if (few > mostFactors) return null
  let [over, under] = [1n, 1n]
  for (let i = 0; i < few; i += 1) {
    over *= BigInt(total - many - i)
    under *= BigInt(total - i)
  }
  return complement(fractionOf(over, under))
}
