/** A run of an organiser's own ticket numbers, both ends included. `series` is the letters in front, in upper case, or ''. */
export interface TicketRange {
  readonly series: string
  readonly from: number
  readonly to: number
}

export type TicketNumbersResult =
  | { readonly ok: true; readonly ranges: readonly TicketRange[] }
  | { readonly ok: false; readonly problem: 'unreadable' | 'backwards' | 'mixed-series'; readonly part: string }

const PART = /^([A-Za-z]{0,8})(\d{1,15})(?:[-–—]([A-Za-z]{0,8})(\d{1,15}))?$/

/**
 * Reads numbers as people write them: `101-120, 133`, `A7; A9–A12`, `5 to 9`. Zeros in front do not count.
 * Returns no range for an empty text.
 */
export function parseTicketNumbers(text: string): TicketNumbersResult {
  const ranges: TicketRange[] = []
  const parts = text
    .trim()
    .replace(/\s+to\s+/gi, '-')
    .replace(/\s*[-–—]\s*/g, '-')
    .split(/[\s,;]+/)
  for (const part of parts) {
    if (part === '') continue
    const match = PART.exec(part)
    if (!match) return { ok: false, problem: 'unreadable', part }
    const series = (match[1] ?? '').toUpperCase()
    const from = Number(match[2])
    const to = match[4] === undefined ? from : Number(match[4])
    if (match[3] && match[3].toUpperCase() !== series) return { ok: false, problem: 'mixed-series', part }
    if (to < from) return { ok: false, problem: 'backwards', part }
    ranges.push({ series, from, to })
  }
  return { ok: true, ranges }
}

/** How many numbers the ranges hold, one counted as often as it stands there. */
export function countTicketNumbers(ranges: readonly TicketRange[]): number {
  return ranges.reduce((sum, { from, to }) => sum + (to - from + 1), 0)
}

/** A number that two rows, or one row twice, lay claim to. */
export interface DoubledNumber {
  readonly number: string
  readonly firstRow: number
  readonly secondRow: number
}

interface SeriesRows {
  from: number[]
  to: number[]
  row: number[]
}

/** Collects the ranges of a whole file and finds numbers that stand in it twice: n log n in the number of ranges. */
export class TicketNumberRegister {
  readonly #series = new Map<string, SeriesRows>()

  add(ranges: readonly TicketRange[], row: number): void {
    for (const { series, from, to } of ranges) {
      let rows = this.#series.get(series)
      if (!rows) this.#series.set(series, (rows = { from: [], to: [], row: [] }))
      rows.from.push(from)
      rows.to.push(to)
      rows.row.push(row)
    }
  }

  /** The first doubled number of each two ranges that overlap, ordered by the later row; at most `limit` of them. */
  doubled(limit: number): DoubledNumber[] {
    const found: DoubledNumber[] = []
    for (const [series, { from, to, row }] of this.#series) {
      const order = Uint32Array.from(from.keys()).sort((a, b) => at(from, a) - at(from, b) || at(row, a) - at(row, b))
      let reaching: number | null = null
      for (const index of order) {
        if (reaching !== null && at(from, index) <= at(to, reaching)) {
          const rows = [at(row, reaching), at(row, index)].sort((a, b) => a - b)
          found.push({ number: `${series}${at(from, index)}`, firstRow: at(rows, 0), secondRow: at(rows, 1) })
        }
        if (reaching === null || at(to, index) > at(to, reaching)) reaching = index
      }
    }
    return found.sort((a, b) => a.secondRow - b.secondRow || a.firstRow - b.firstRow).slice(0, limit)
  }
}

function at(values: readonly number[], index: number): number {
  return values[index] ?? Number.NaN
}
