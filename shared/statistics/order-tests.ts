import type { Walk, WalkRule } from '../sampling/walk.ts'
import { normalTwoSided, studentTwoSided } from './probability-values.ts'

export interface OrderTest {
  /** Two-sided: how often chance alone does as much or more. */
  readonly p: number
}

/**
 * Spearman's rank correlation of two orders of the same n things, each a permutation of 1 … n without ties (Spearman
 * 1904), and its two-sided p by Student's t with n - 2 degrees of freedom. Requires n >= 10: below, t is too rough.
 */
export function spearman(first: readonly number[], second: readonly number[]): OrderTest & { readonly rho: number } {
  const n = first.length
  if (n < 10 || second.length !== n) throw new RangeError('two orders of the same ten things or more')
  let squares = 0
  for (let i = 0; i < n; i += 1) squares += ((first[i] as number) - (second[i] as number)) ** 2
  const rho = 1 - (6 * squares) / (n * (n * n - 1))
  const p = Math.abs(rho) === 1 ? 0 : studentTwoSided(rho * Math.sqrt((n - 2) / (1 - rho * rho)), n - 2)
  return { rho, p }
}

/** One pick as the entry order test sees it. Counts of tickets that were in at this pick. */
export interface OrderedPick {
  /** Tickets of the entrants who stand before the one picked in the list. */
  readonly before: number
  /** Tickets of the one picked. */
  readonly held: number
  readonly remaining: number
  /** The sum, over all entrants, of the third power of the tickets they had in. */
  readonly cubes: number
}

/** What picks amount to; sums of several draws add up. */
export interface OrderSums {
  readonly picks: number
  /** The sum of how far down the list the picks fell, each from 0 to 1, less a half. */
  readonly drift: number
  /** The variance of `drift` under chance alone. */
  readonly variance: number
}

export const noPicks: OrderSums = { picks: 0, drift: 0, variance: 0 }

/**
 * Adds a pick. Its place is the middle of the picked entrant's tickets in the row of all tickets in: the mid-distribution
 * transform of a discrete variable (Parzen). Under chance alone its mean is exactly 1/2, whoever holds how much and
 * whoever has left, and its variance (1 - sum of p³)/12 over the shares p of all entrants.
 */
export function addPick(sums: OrderSums, { before, held, remaining, cubes }: OrderedPick): OrderSums {
  return {
    picks: sums.picks + 1,
    drift: sums.drift + (before + held / 2) / remaining - 0.5,
    variance: sums.variance + (1 - cubes / remaining ** 3) / 12,
  }
}

export const addSums = (a: OrderSums, b: OrderSums): OrderSums => ({
  picks: a.picks + b.picks,
  drift: a.drift + b.drift,
  variance: a.variance + b.variance,
})

/**
 * The entry order test: whether winners come too early or too late in the list, over any draws. Given what was picked
 * before, each place has mean 1/2, so the sum is a martingale and, standardised, near to normal (martingale central limit
 * theorem). In a list with one ticket each that is drawn to its end it is the score test for a trend in the Plackett-Luce
 * model. Null where there is nothing to test.
 */
export function entryOrder(sums: OrderSums): (OrderTest & { readonly z: number; readonly mean: number }) | null {
  if (sums.variance === 0) return null
  const z = sums.drift / Math.sqrt(sums.variance)
  return { z, mean: 0.5 + sums.drift / sums.picks, p: normalTwoSided(z) }
}

/** Collects the picks of one draw as they come, from the sealed counts alone. */
export class EntryOrderOfDraw {
  private totals: OrderSums = noPicks
  private cubes: number

  /** `cubes`: the sum of the third powers of all sealed ticket counts. */
  constructor(
    cubes: number,
    private readonly rule: WalkRule,
  ) {
    this.cubes = cubes
  }

  /** A pick by its walk: the coins say where in the row of all tickets in its leaf stands, and how many it has. */
  add({ coins, remaining }: Pick<Walk, 'coins' | 'remaining'>): void {
    let before = 0
    let held = remaining
    for (const [left, right, , fall] of coins) {
      if (fall === 'T') before += left
      held = fall === 'T' ? right : left
    }
    this.totals = addPick(this.totals, { before, held, remaining, cubes: this.cubes })
    this.cubes -= this.rule === 'one-prize-each' ? held ** 3 : held ** 3 - (held - 1) ** 3
  }

  sums(): OrderSums {
    return this.totals
  }
}
