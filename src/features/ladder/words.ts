import { capitalise, countOf, formatNumber, numberWord, ordinal } from '#src/ui/format-number.ts'
import { coinShape, type LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { weigh } from './geometry.ts'

/** Keeps a figure on the line of the word before it. */
const NBSP = '\u00a0'

export interface CoinWords {
  /** What happened, in sentences. */
  readonly account: string
  /** Where it leads: "Heads, so left." */
  readonly verdict: string
}

/** One coin in words: which flip settled it, against which digit, and where the walk goes. */
export function coinWords(coin: LadderCoin): CoinWords {
  const shape = coinShape(coin)
  const verdict = shape.heads ? 'Heads, so left.' : 'Tails, so right.'
  if (shape.certain) {
    const empty = shape.left === 0 ? 'left' : 'right'
    return {
      account: `Nobody is left on the ${empty} side, so this coin takes no flip.`,
      verdict: shape.heads ? 'The walk goes left.' : 'The walk goes right.',
    }
  }
  const { rungs } = weigh(coin)
  const last = rungs.at(-1)
  if (!last) throw new RangeError('a coin with tickets on both sides takes a flip')
  const before = rungs.length - 1
  const lead =
    before === 0
      ? ''
      : before === 1
        ? 'The first flip equalled its digit. '
        : `The first ${numberWord(before)} flips equalled their digits. `
  const nth = `The ${ordinal(rungs.length)}${before === 0 ? ' flip' : ''}`
  const its = before === 0 ? 'the digit' : 'its digit'
  if (last.flip === last.digit) {
    return {
      account: `${lead}${nth},${NBSP}${last.flip}, equals ${its}, and the chance has no digit left to beat.`,
      verdict,
    }
  }
  const compared = last.flip < last.digit ? 'lower' : 'higher'
  return { account: `${lead}${nth},${NBSP}${last.flip}, is ${compared} than ${its},${NBSP}${last.digit}.`, verdict }
}

/** A bar for those who hear it. */
export function barWords(coin: LadderCoin): string {
  const { left, right, heads, certain } = coinShape(coin)
  const sides = `${countOf(left, 'ticket')} on the left, ${formatNumber(right)} on the right`
  if (certain) return `${sides}; the walk goes ${heads ? 'left' : 'right'}`
  return `${sides}; the coin came up ${heads ? 'heads, so left' : 'tails, so right'}`
}

/** "Five coins, 11 flips". */
export function walkSize(coins: readonly LadderCoin[]): string {
  if (coins.length === 0) return 'No coin needed'
  const flips = coins.reduce((sum, coin) => sum + coin[2].length, 0)
  return `${capitalise(countOf(coins.length, 'coin', 'coins', true))}, ${flips === 0 ? 'no flip' : countOf(flips, 'flip')}`
}

/** The sides that a walk took, said one by one. */
export function walkSides(coins: readonly LadderCoin[]): string {
  return coins.map((coin) => (coin[3] === 'H' ? 'heads' : 'tails')).join(', ')
}
