import { tossCoin, type FlipStream } from '#shared/sampling/coin.ts'
import { CountTree, type Walk } from '#shared/sampling/walk.ts'

/** A list small enough to follow by hand: invented for this page. */
export const ENTRANTS = [
  { name: 'Oda', tickets: 3 },
  { name: 'Piet', tickets: 4 },
  { name: 'Wren', tickets: 1 },
] as const

const FLIPS = '100111'

function written(flips: string): FlipStream {
  let at = 0
  return {
    next() {
      const flip = flips[at]
      at += 1
      return flip === undefined ? -1 : flip === '1' ? 1 : 0
    },
  }
}

/** The walk that these flips give over the small list, by the very code that settles draws. */
export function exampleWalk(): Walk {
  const walk = new CountTree(ENTRANTS.map((entrant) => entrant.tickets)).walk(written(FLIPS))
  if (!walk) throw new Error('the example has too few flips')
  return walk
}

export interface CoinCase {
  readonly flips: string
  readonly used: string
  readonly heads: boolean
}

/** Every way that so many flips can fall, and what each makes of a coin with chance a/b. */
export function everyWay(a: number, b: number, count: number): readonly CoinCase[] {
  return Array.from({ length: 2 ** count }, (_, index) => {
    const flips = index.toString(2).padStart(count, '0')
    const fall = tossCoin(a, b, written(flips))
    if (!fall) throw new Error('too few flips to settle this coin')
    return { flips, used: fall.flips, heads: fall.heads }
  })
}
