import { explainCoin, type CoinRung } from '#shared/sampling/coin.ts'

/** One coin of a walk: tickets on the left, on the right, the flips, the side it took (heads is left). */
export type LadderCoin = readonly [left: number, right: number, flips: string, side: 'H' | 'T']

/** At most so many strips are drawn in one fan. */
export const MOST_LINES = 120

export interface CoinShape {
  readonly left: number
  readonly right: number
  readonly total: number
  readonly heads: boolean
  /** Tickets on the chosen side. */
  readonly chosen: number
  /** The left side's share of the width, 0 to 100. */
  readonly leftPercent: number
  /** Where the chosen side begins, in tickets from the left. */
  readonly start: number
  /** Nobody stands on one side: the coin takes no flip. */
  readonly certain: boolean
}

export function coinShape([left, right, , side]: LadderCoin): CoinShape {
  const total = left + right
  const heads = side === 'H'
  return {
    left,
    right,
    total,
    heads,
    chosen: heads ? left : right,
    leftPercent: (left / total) * 100,
    start: heads ? 0 : left,
    certain: left === 0 || right === 0,
  }
}

export interface Fan {
  /** Width of the drawing; a ticket is one unit wide while that can be drawn exactly. */
  readonly width: number
  /** The two edges of the chosen side. */
  readonly lip: string
  /** Every third strip's line: what phones draw. */
  readonly hair: string
  /** The lines between them. */
  readonly fine: string
  /** Tickets that one strip stands for. */
  readonly ticketsPerStrip: number
}

/**
 * The chosen side opening out to the full width of the next row: for every k from 0 to n a line from (start + k, 0) to
 * (k × total / n, height), so that each strip between two lines is one ticket. Above 120 lines, every ⌈n/120⌉th.
 */
export function fan(coin: CoinShape, height = 100, mostLines = MOST_LINES, drawnWidth?: number): Fan {
  const width = drawnWidth ?? Math.min(coin.total, 100_000)
  const unit = width / coin.total
  const n = coin.chosen
  const step = Math.ceil(n / mostLines)
  const line = (k: number) => `M${trim((coin.start + k) * unit)} 0L${trim((k * width) / n)} ${height}`
  let hair = ''
  let fine = ''
  for (let k = step, index = 1; k < n; k += step, index += 1) {
    if (index % 3 === 0) hair += line(k)
    else fine += line(k)
  }
  return { width, lip: line(0) + line(n), hair, fine, ticketsPerStrip: step }
}

/** At most three decimal places: a thousandth of a ticket's width. */
export function trim(value: number): string {
  return String(Math.round(value * 1000) / 1000)
}

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
