/**
 * How a walk is drawn to scale: the same numbers for the pages, the card and its picture.
 */

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

export interface MiniSize {
  readonly width: number
  readonly bar: number
  readonly fan: number
}

/** Bars 7 and fans 14 high; long walks are drawn closer, so that 20 coins stay beside their winner. */
export function miniSize(coins: number, width = 250): MiniSize {
  if (coins <= 7) return { width, bar: 7, fan: 14 }
  if (coins <= 13) return { width, bar: 5, fan: 8 }
  return { width, bar: 4, fan: 5 }
}

export function miniHeight(coins: number, size = miniSize(coins)): number {
  return coins * (size.bar + size.fan) + size.bar + 2
}

/** One coin of a small ladder, from the left; `lost` is null where nobody stands on one side. */
export interface MiniCoinShape {
  readonly heads: boolean
  readonly won: { readonly x: number; readonly width: number }
  readonly lost: { readonly x: number; readonly width: number } | null
  /** The fan below the bar, as an SVG path. */
  readonly lines: string
}

export function miniCoin(coin: LadderCoin, size: MiniSize): MiniCoinShape {
  const shape = coinShape(coin)
  const { heads } = shape
  const split = (shape.leftPercent / 100) * size.width
  // No side is under 3 units here either.
  const lost = Math.max(3, heads ? size.width - split : split)
  const { fine, hair, lip } = fan(shape, size.fan, 24, size.width)
  return {
    heads,
    won: { x: heads ? 0 : round(split), width: round(heads ? split : size.width - split) },
    lost: shape.certain ? null : { x: round(heads ? size.width - lost + 0.5 : 0.5), width: round(lost - 1) },
    lines: fine + hair + lip,
  }
}

const round = (value: number) => Number(trim(value))
