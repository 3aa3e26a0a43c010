import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import { textProblem } from '#shared/bytes/text.ts'

/** The columns that an entrant file may have; any others are ignored. */
export const ENTRANT_COLUMNS = ['name', 'tickets', 'email', 'phone', 'numbers', 'label'] as const
export type EntrantColumn = (typeof ENTRANT_COLUMNS)[number]

const REQUIRED: readonly EntrantColumn[] = ['name', 'tickets']

export interface EntrantHeader {
  /** Where each known column stands, and what the file calls it. */
  readonly columns: ReadonlyMap<EntrantColumn, { readonly index: number; readonly title: string }>
  /** The file's names of the columns that nothing reads. */
  readonly ignored: readonly string[]
  /** How many columns the first row names. */
  readonly width: number
}

/** Reads the row of column names. Letter case, white space around and a byte order mark do not matter. */
export function readEntrantHeader(
  cells: readonly string[],
): Result<EntrantHeader, Failure<'column-missing' | 'column-doubled'>> {
  const columns = new Map<EntrantColumn, { index: number; title: string }>()
  const ignored: string[] = []
  for (const [index, cell] of cells.entries()) {
    const title = cell.replace(/^\uFEFF/, '').trim()
    const known = ENTRANT_COLUMNS.find((column) => column === title.toLowerCase())
    if (known === undefined) {
      if (title !== '') ignored.push(shorten(title))
      continue
    }
    if (columns.has(known)) {
      return fail('column-doubled', title, `two columns are called ${known}. Keep one of them.`)
    }
    columns.set(known, { index, title })
  }
  const missing = REQUIRED.filter((column) => !columns.has(column))
  if (missing.length > 0) {
    const found = [...columns.keys(), ...ignored].map((title) => JSON.stringify(title)).join(', ')
    const message = `there is no column called ${missing.join(' and none called ')}. The first row must name the columns; it reads ${found}.`
    return fail('column-missing', missing[0] ?? '', message)
  }
  return ok({ columns, ignored, width: cells.length })
}

function shorten(title: string): string {
  const clean = textProblem(title) === null ? title : '(unreadable)'
  return clean.length > 40 ? `${clean.slice(0, 40)}…` : clean
}
