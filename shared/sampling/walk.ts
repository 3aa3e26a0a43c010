import { levelSizes } from '../merkle/tree-shape.ts'
import { tossCoin, type FlipStream } from './coin.ts'

/** What leaves when a leaf is picked: all its tickets, or the one that was drawn. */
export type WalkRule = 'one-prize-each' | 'every-ticket'

/** A coin passed on a walk: tickets still in on the left, on the right, the flips it took, and how it fell. */
export type WalkCoin = readonly [left: number, right: number, flips: string, fall: 'H' | 'T']

/** One pick: where it led and by which coins, root first. */
export interface Walk {
  readonly leaf: number
  /** Tickets in before this pick. */
  readonly remaining: number
  readonly coins: readonly WalkCoin[]
}

/** The tickets still in, kept as counts over the tree's shape: 16 bytes a leaf. */
export class CountTree {
  private readonly levels: readonly Float64Array[]

  /**
   * Counts over leaves in their order. Requires at least one leaf, safe whole numbers ≥ 0, and a total of at most
   * 2^53 − 1; throws a RangeError otherwise. The numbers are copied.
   */
  constructor(tickets: ArrayLike<number>) {
    this.levels = levelSizes(tickets.length).map((nodes) => new Float64Array(nodes))
    const leaves = this.levels[0] as Float64Array
    for (let i = 0; i < leaves.length; i += 1) leaves[i] = count(tickets[i])
    for (let level = 1; level < this.levels.length; level += 1) {
      const below = this.levels[level - 1] as Float64Array
      const here = this.levels[level] as Float64Array
      for (let i = 0; i < here.length; i += 1) here[i] = count((below[2 * i] as number) + (below[2 * i + 1] ?? 0))
    }
  }

  /** Tickets still in. */
  get remaining(): number {
    return this.levels[this.levels.length - 1]?.[0] as number
  }

  /** Tickets of one leaf still in. Throws a RangeError for a leaf that is not there. */
  ticketsOf(leaf: number): number {
    const tickets = this.levels[0]?.[leaf]
    if (tickets === undefined) throw new RangeError(`no leaf ${leaf}`)
    return tickets
  }

  /**
   * Walks from the root to a leaf (PROTOCOL section 7) without taking anything out; null where the stream runs dry,
   * and then nothing has changed. Requires tickets to be left; throws a RangeError otherwise.
   */
  walk(stream: FlipStream): Walk | null {
    const remaining = this.remaining
    if (remaining === 0) throw new RangeError('no ticket is left to draw from')
    const coins: WalkCoin[] = []
    let at = 0
    for (let level = this.levels.length - 1; level > 0; level -= 1) {
      const below = this.levels[level - 1] as Float64Array
      const left = below[2 * at] as number
      const right = below[2 * at + 1]
      at *= 2
      // An odd last node was carried up: it is the same node on both levels, so no coin stands here.
      if (right === undefined) continue
      const fall = tossCoin(left, left + right, stream)
      if (fall === null) return null
      coins.push([left, right, fall.flips, fall.heads ? 'H' : 'T'])
      if (!fall.heads) at += 1
    }
    return { leaf: at, remaining, coins }
  }

  /** Takes a picked leaf's tickets out by the rule. Throws a RangeError where that leaf has none left. */
  remove(leaf: number, rule: WalkRule): void {
    const tickets = this.ticketsOf(leaf)
    if (tickets === 0) throw new RangeError(`leaf ${leaf} has no ticket left`)
    const leaving = rule === 'one-prize-each' ? tickets : 1
    let at = leaf
    for (const level of this.levels) {
      level[at] = (level[at] as number) - leaving
      at = Math.floor(at / 2)
    }
  }
}

function count(value: number | undefined): number {
  if (!Number.isSafeInteger(value) || (value as number) < 0) throw new RangeError(`no such ticket count: ${value}`)
  return value as number
}
