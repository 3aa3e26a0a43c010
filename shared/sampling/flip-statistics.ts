import type { WalkCoin } from './walk.ts'

/** How many flips the coins of a draw took, beside what theory expects of exactly these coins. */
export interface FlipStatistics {
  readonly coins: number
  /** Coins whose fall was not settled from the start. */
  readonly coinsWithFlips: number
  readonly flips: number
  /** Expected flips of these coins, rounded to two places. */
  readonly expected: string
  /** For 1, 2, 3, … flips: how many coins took as many, and how many were expected to, to one place. */
  readonly histogram: readonly { readonly flips: number; readonly coins: number; readonly expected: string }[]
}

/** Beyond this a coin goes on with a chance below 2^-60. */
const LONGEST = 60

/**
 * Collects coins as they pass. A coin of chance a/b, in lowest terms, goes on to another flip with chance 1/2 each time
 * for ever, unless b is a power of two, 2^m: then it ends with its m-th flip at the latest (PROTOCOL section 6). So k
 * flips have chance 2^-k, and the m-th of a dyadic coin 2^-(m-1); the mean is 2, or 2 - 2^(1-m).
 */
export class FlipCounter {
  private coins = 0
  private coinsWithFlips = 0
  private flips = 0
  /** `endless` and, by m, `dyadic`: how many coins of each kind. */
  private endless = 0
  private readonly dyadic: number[] = []
  private readonly taken: number[] = []

  add([left, right, flips]: WalkCoin): void {
    this.coins += 1
    if (left === 0 || right === 0) return
    this.coinsWithFlips += 1
    this.flips += flips.length
    this.taken[flips.length] = (this.taken[flips.length] ?? 0) + 1
    const m = dyadicLength(left, left + right)
    if (m === null) this.endless += 1
    else this.dyadic[m] = (this.dyadic[m] ?? 0) + 1
  }

  result(): FlipStatistics {
    const histogram = []
    let expected = 0
    for (let k = 1; k <= LONGEST; k += 1) {
      const share = this.share(k)
      expected += k * share
      if (k < this.taken.length || share >= 0.05) {
        histogram.push({ flips: k, coins: this.taken[k] ?? 0, expected: share.toFixed(1) })
      }
    }
    return {
      coins: this.coins,
      coinsWithFlips: this.coinsWithFlips,
      flips: this.flips,
      expected: expected.toFixed(2),
      histogram,
    }
  }

  /** How many coins are expected to take exactly k flips. */
  private share(k: number): number {
    let share = this.endless * 2 ** -k
    for (const [m, coins] of this.dyadic.entries()) {
      if (coins === undefined || m < k) continue
      share += coins * (m === k ? 2 ** (1 - k) : 2 ** -k)
    }
    return share
  }
}

/** m where a/b in lowest terms has the denominator 2^m; null for any other. */
function dyadicLength(a: number, b: number): number | null {
  let denominator = b / greatestCommonDivisor(a, b)
  let m = 0
  while (denominator % 2 === 0) {
    denominator /= 2
    m += 1
  }
  return denominator === 1 ? m : null
}

function greatestCommonDivisor(a: number, b: number): number {
  let [x, y] = [a, b]
  while (y !== 0) [x, y] = [y, x % y]
  return x
}
