import { explainCoin, type CoinRung } from '#shared/sampling/coin.ts'
import type { LadderCoin } from '#shared/sampling/ladder-shape.ts'

export interface SideLabel {
  readonly glyph: boolean
  /** The word left or right fits too, on a wide screen. */
  readonly word: boolean
  /** Where the figure fits: everywhere, on wide screens only, or nowhere. */
  readonly figure: 'everywhere' | 'wide' | 'nowhere'
}

/** The least widths of a bar in px: from 1241 px of screen, from 901 px, and on a phone of 320 px. */
const WIDE_BAR = 779
const MIDDLE_BAR = 597
const PHONE_BAR = 264

/** What can be written on a side of a bar without being cut off. Under 12 % a side loses its glyph. */
export function sideLabel(percent: number, digits: number): SideLabel {
  const glyph = percent >= 12
  const wide = (percent / 100) * WIDE_BAR
  const middle = (percent / 100) * MIDDLE_BAR
  const phone = (percent / 100) * PHONE_BAR
  const wideFits = wide >= digits * 13 + 16 + (glyph ? 42 : 0)
  const phoneFits = phone >= digits * 11.5 + 12 + (glyph ? 26 : 0)
  return {
    glyph,
    word: glyph && middle >= digits * 13 + 120,
    figure: phoneFits ? 'everywhere' : wideFits ? 'wide' : 'nowhere',
  }
}

export interface Weighing {
  readonly rungs: readonly CoinRung[]
  /** Digits of the chance after the last flip, at most `more` of them. */
  readonly rest: string
  /** The digits go on for ever, or at least beyond `rest`. */
  readonly goesOn: boolean
}

/** The flips held against the digits of left/total. Throws where these flips do not settle this coin. */
export function weigh([left, right, flips]: LadderCoin, more = 4): Weighing {
  const total = left + right
  const rungs = explainCoin(left, total, flips)
  let remainder = BigInt(rungs.at(-1)?.remainder ?? 0)
  const whole = BigInt(total)
  let rest = ''
  for (let i = 0; i < more && remainder > 0n; i += 1) {
    remainder *= 2n
    const digit = remainder >= whole ? 1n : 0n
    remainder -= digit * whole
    rest += digit
  }
  return { rungs, rest, goesOn: remainder > 0n }
}
