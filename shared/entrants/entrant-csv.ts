import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import { importText, TEXT_PROBLEMS, textProblem } from '#shared/bytes/text.ts'
import { defaultLabel } from '#shared/entrants/default-label.ts'
import { ENTRANT_COLUMNS, type EntrantColumn, readEntrantHeader } from '#shared/entrants/entrant-header.ts'
import {
  countTicketNumbers,
  parseTicketNumbers,
  type TicketRange,
  TicketNumberRegister,
} from '#shared/entrants/ticket-numbers.ts'
import { parseTicketCount, type TicketCountCode } from '#shared/entrants/ticket-count.ts'

/** A row of an entrant file, checked. Texts are in NFC; those that the file leaves out are empty. */
export interface EntrantRow {
  /** Where it stands in the file; the row of column names is row 1. */
  readonly row: number
  readonly name: string
  /** Whole, 1 to 2^32 - 1. */
  readonly tickets: number
  readonly email: string
  readonly phone: string
  /** The organiser's own ticket numbers as written, and as read. */
  readonly numbers: string
  readonly ranges: readonly TicketRange[]
  /** The words that announce the entrant: the file's, or the default of `defaultLabel`. */
  readonly label: string
}

/** Why a row, or the whole file, is refused. A closed list. */
export type EntrantCsvCode =
  | TicketCountCode
  | 'file-empty'
  | 'no-entrants'
  | 'column-missing'
  | 'column-doubled'
  | 'too-many-cells'
  | 'name-missing'
  | 'text-too-long'
  | 'text-refused'
  | 'encoding'
  | 'formula'
  | 'email-unreadable'
  | 'phone-unreadable'
  | 'numbers-unreadable'
  | 'number-doubled'
  | 'too-many-entrants'
  | 'too-many-tickets'

/** One problem: `row` counts as a spreadsheet does; `column` is the file's own name for it, or null for a whole row. */
export interface EntrantCsvProblem {
  readonly row: number
  readonly column: string | null
  readonly code: EntrantCsvCode
  /** A whole sentence that names the row and says what to do. */
  readonly message: string
}

/** Something that does not stop an import, but that somebody should look at. */
export interface EntrantCsvNote {
  readonly row: number
  readonly code: 'column-ignored' | 'numbers-and-tickets-differ'
  readonly message: string
}

export type PushResult =
  | { readonly kind: 'header' }
  | { readonly kind: 'blank' }
  | { readonly kind: 'entrant'; readonly entrant: EntrantRow; readonly notes: readonly EntrantCsvNote[] }
  | { readonly kind: 'refused'; readonly problems: readonly EntrantCsvProblem[] }

export interface EntrantCsvTotals {
  readonly entrants: number
  readonly tickets: number
}

/** Longest text in a cell, in characters (UTF-16 units). */
export const MAX_CELL_LENGTH = 200
/** Most entrants of one draw (PROTOCOL, Limits). */
export const MAX_ENTRANTS = 2_000_000
const MAX_DOUBLED_NUMBERS = 100

export interface EntrantCsvValidator {
  /** Takes the next row of the file, the column names first. `row` counts from 1, blank rows included. */
  push(cells: readonly string[], row: number): PushResult
  /** What was said about the column names: columns that are ignored. */
  readonly headerNotes: readonly EntrantCsvNote[]
  /** Call once, after the last row: what can be seen only in the whole file. The totals count accepted rows. */
  finish(): { readonly problems: readonly EntrantCsvProblem[]; readonly totals: EntrantCsvTotals }
}

/**
 * The rules for a file of entrants (columns name and tickets; where present email, phone, numbers and label), apart from
 * reading it. The office's import and the command line both use this. It keeps no row, only ticket numbers and totals.
 */
export function createEntrantCsvValidator(): EntrantCsvValidator {
  return new Validator()
}

class Validator implements EntrantCsvValidator {
  headerNotes: readonly EntrantCsvNote[] = []
  readonly #register = new TicketNumberRegister()
  #columns: ReadonlyMap<EntrantColumn, { readonly index: number; readonly title: string }> | null = null
  #width = 0
  #headerRefused = false
  #rows = 0
  #entrants = 0
  #tickets = 0

  push(cells: readonly string[], row: number): PushResult {
    if (cells.every((cell) => cell.trim() === '')) return { kind: 'blank' }
    if (this.#headerRefused) return { kind: 'blank' }
    if (this.#columns === null) return this.#header(cells, row)
    this.#rows++
    const problems: EntrantCsvProblem[] = []
    const refuse = (column: string | null, code: EntrantCsvCode, message: string) => {
      problems.push({ row, column, code, message: `Row ${row}: ${message}` })
    }
    if (cells.length > this.#width && cells.slice(this.#width).some((cell) => cell.trim() !== '')) {
      const message =
        `it has ${cells.length} cells, but the first row names ${this.#width} columns. ` +
        'Put quotation marks around a text that holds a comma.'
      refuse(null, 'too-many-cells', message)
      return { kind: 'refused', problems }
    }
    const texts = { name: '', tickets: '', email: '', phone: '', numbers: '', label: '' }
    for (const column of ENTRANT_COLUMNS) {
      const place = this.#columns.get(column)
      if (place === undefined) continue
      const text = checkCell(column, cells[place.index] ?? '')
      if (text.ok) texts[column] = text.value
      else refuse(place.title, text.error.code, text.error.message)
    }
    const title = (column: EntrantColumn) => this.#columns?.get(column)?.title ?? column
    if (problems.length > 0) return { kind: 'refused', problems }

    if (texts.name === '') {
      refuse(title('name'), 'name-missing', 'there is no name. Write one, or delete the row.')
    }
    const tickets = parseTicketCount(texts.tickets)
    if (!tickets.ok) refuse(title('tickets'), tickets.error.code, tickets.error.message)
    const numbers = parseTicketNumbers(texts.numbers)
    if (!numbers.ok) refuse(title('numbers'), 'numbers-unreadable', numbersMessage(numbers.problem, numbers.part))
    if (problems.length > 0 || !tickets.ok || !numbers.ok) return { kind: 'refused', problems }

    if (this.#entrants + 1 > MAX_ENTRANTS) {
      refuse(null, 'too-many-entrants', 'a draw holds at most 2,000,000 entrants. Join entries of the same person.')
    } else if (this.#tickets + tickets.value > Number.MAX_SAFE_INTEGER) {
      refuse(title('tickets'), 'too-many-tickets', 'with it, the draw has more tickets than 9,007,199,254,740,991.')
    }
    if (problems.length > 0) return { kind: 'refused', problems }
    this.#entrants++
    this.#tickets += tickets.value
    this.#register.add(numbers.ranges, row)
    const entrant: EntrantRow = {
      row,
      name: texts.name,
      tickets: tickets.value,
      email: texts.email,
      phone: texts.phone,
      numbers: texts.numbers,
      ranges: numbers.ranges,
      label: texts.label === '' ? defaultLabel(texts.name) : texts.label,
    }
    return { kind: 'entrant', entrant, notes: numbersNotes(entrant) }
  }

  finish() {
    const problems: EntrantCsvProblem[] = []
    if (this.#columns === null && !this.#headerRefused) {
      const message =
        'The file is empty. Its first row must name the columns, at least name and tickets; entrants come below.'
      problems.push({ row: 1, column: null, code: 'file-empty', message })
    } else if (this.#rows === 0 && !this.#headerRefused) {
      const message = 'The file names its columns but has no entrant below them. Add a row for each entrant.'
      problems.push({ row: 2, column: null, code: 'no-entrants', message })
    }
    for (const { number, firstRow, secondRow } of this.#register.doubled(MAX_DOUBLED_NUMBERS)) {
      const message =
        firstRow === secondRow
          ? `Row ${secondRow}: ticket number ${number} stands in it twice. Take it out once.`
          : `Row ${secondRow}: ticket number ${number} is also in row ${firstRow}. A number belongs to one entrant: ` +
            'look at the counterfoil and correct one of the two rows.'
      const column = this.#columns?.get('numbers')?.title ?? 'numbers'
      problems.push({ row: secondRow, column, code: 'number-doubled', message })
    }
    return { problems, totals: { entrants: this.#entrants, tickets: this.#tickets } }
  }

  #header(cells: readonly string[], row: number): PushResult {
    const header = readEntrantHeader(cells)
    if (!header.ok) {
      this.#headerRefused = true
      const { code, at, message } = header.error
      return {
        kind: 'refused',
        problems: [{ row, column: at === '' ? null : at, code, message: `Row ${row}: ${message}` }],
      }
    }
    this.#columns = header.value.columns
    this.#width = header.value.width
    this.headerNotes = header.value.ignored.map((title) => ({
      row,
      code: 'column-ignored',
      message: `The column ${JSON.stringify(title)} is not used and will not be stored.`,
    }))
    return { kind: 'header' }
  }
}

type CellCode = 'encoding' | 'text-refused' | 'text-too-long' | 'formula' | 'email-unreadable' | 'phone-unreadable'

/** A cell's text as it will be stored: trimmed, in NFC, and fit for the record (PROTOCOL "Writing"). */
function checkCell(column: EntrantColumn, cell: string): Result<string, Failure<CellCode>> {
  const trimmed = cell.trim()
  // Plain ASCII, as most cells are, is in NFC and holds nothing that the record refuses.
  const plain = PLAIN.test(trimmed)
  if (!plain && trimmed.includes('\uFFFD')) {
    const message = 'has a character that was lost when the file was saved. Save it again as "CSV UTF-8".'
    return fail('encoding', column, `the ${column} ${message}`)
  }
  const text = plain ? trimmed : importText(trimmed)
  const problem = plain ? null : textProblem(text)
  if (problem !== null) {
    return fail('text-refused', column, `the ${column} ${TEXT_PROBLEMS[problem]}. Type it again without it.`)
  }
  if (text.length > MAX_CELL_LENGTH) {
    return fail('text-too-long', column, `the ${column} is longer than ${MAX_CELL_LENGTH} characters. Shorten it.`)
  }
  if (column === 'tickets') return ok(text)
  if (/^[=+\-@]/.test(text) && !(column === 'phone' && PHONE_WITH_PLUS.test(text))) {
    const message = `the ${column} begins with ${text.charAt(0)} as a formula does. Write the plain text, or leave the cell empty.`
    return fail('formula', column, message)
  }
  if (column === 'email' && text !== '' && !EMAIL.test(text)) {
    const message = `${JSON.stringify(text)} is not an e-mail address. Correct it, or leave the cell empty.`
    return fail('email-unreadable', column, message)
  }
  if (column === 'phone' && text !== '' && !/\d.*\d.*\d/.test(text)) {
    const message = `${JSON.stringify(text)} is not a telephone number. Correct it, or leave the cell empty.`
    return fail('phone-unreadable', column, message)
  }
  return ok(text)
}

const PLAIN = /^[\x20-\x7e]*$/
const PHONE_WITH_PLUS = /^\+[0-9][0-9 ()./-]*(?:(?:x|ext\.?) ?[0-9]+)?$/i
const EMAIL = /^[^\s@,;<>"]+@[^\s@,;<>".]+(?:\.[^\s@,;<>".]+)+$/

function numbersMessage(problem: 'unreadable' | 'backwards' | 'mixed-series', part: string): string {
  const shown = JSON.stringify(part)
  if (problem === 'backwards') return `the ticket numbers ${shown} run backwards. Write the lower number first.`
  if (problem === 'mixed-series') return `the ticket numbers ${shown} begin and end with different letters.`
  return `the ticket numbers ${shown} cannot be read. Write them like 101-120, 133.`
}

function numbersNotes({ row, tickets, ranges }: EntrantRow): EntrantCsvNote[] {
  const counted = countTicketNumbers(ranges)
  if (ranges.length === 0 || counted === tickets) return []
  const message = `Row ${row}: it has ${tickets} tickets, but its ticket numbers come to ${counted}. Tickets count in the draw.`
  return [{ row, code: 'numbers-and-tickets-differ', message }]
}
