import { Readable } from 'node:stream'
import { parse } from 'csv-parse'
import {
  createEntrantCsvValidator,
  type EntrantCsvNote,
  type EntrantCsvTotals,
  type EntrantRow,
} from '#shared/entrants/entrant-csv.ts'
import { sniffDelimiter } from '#shared/entrants/delimiter.ts'

export interface CsvProblem {
  /** The row at fault, counted as a spreadsheet does. */
  readonly row: number
  readonly column: string | null
  readonly code: string
  readonly message: string
}

export interface ReadEntrantCsvOptions {
  /** Called with each accepted row, in order; the next is read when it resolves. */
  readonly onEntrant: (entrant: EntrantRow) => void | Promise<void>
  /** Called now and then with the bytes read so far. */
  readonly onProgress?: (bytes: number) => void
  /** Most problems to keep; the rest are counted. 100 where none is given. */
  readonly maxProblems?: number
  /** Stops reading when aborted; the returned promise then rejects with the reason. */
  readonly signal?: AbortSignal
}

export interface ReadEntrantCsvResult {
  readonly totals: EntrantCsvTotals
  /** The first problems, by row. Where there is one, nothing of the file may be stored. */
  readonly problems: readonly CsvProblem[]
  readonly problemCount: number
  readonly notes: readonly EntrantCsvNote[]
  readonly noteCount: number
}

const MAX_ROW_LENGTH = 65_536
const MAX_NOTES = 100

/**
 * Reads a file of entrants as a stream: strict UTF-8 (a byte order mark may lead), commas, semicolons or tabs between
 * cells, quotes as in RFC 4180. Memory does not grow with the file, but for ticket numbers. Bad content comes back as
 * problems; only I/O errors and an abort reject.
 */
export async function readEntrantCsv(
  bytes: AsyncIterable<Uint8Array>,
  options: ReadEntrantCsvOptions,
): Promise<ReadEntrantCsvResult> {
  const validator = createEntrantCsvValidator()
  const problems = new Kept<CsvProblem>(options.maxProblems ?? 100)
  const notes = new Kept<EntrantCsvNote>(MAX_NOTES)
  let row = 0
  const file = new StrictText()
  const text = file.pieces(bytes, options)
  // What the row in which the text breaks off lacks is not its fault.
  let latest: { readonly row: number; readonly problems: readonly CsvProblem[] } = { row: 0, problems: [] }
  let source: Readable | undefined
  try {
    const first = await readHead(text)
    const parser = parse({
      delimiter: sniffDelimiter(first),
      bom: false,
      relax_column_count: true,
      skip_empty_lines: false,
      max_record_size: MAX_ROW_LENGTH,
    })
    source = Readable.from(chain(first, text), { objectMode: true })
    source.on('error', (error) => parser.destroy(error))
    source.pipe(parser)
    for await (const cells of parser) {
      row++
      const result = validator.push(cells as string[], row)
      for (const problem of latest.problems) problems.add(problem)
      latest = { row, problems: result.kind === 'refused' ? result.problems : [] }
      if (result.kind === 'entrant') {
        for (const note of result.notes) notes.add(note)
        // No await where none is due: a million turns of the event loop take longer than the rows.
        const waiting = options.onEntrant(result.entrant)
        if (waiting) await waiting
      }
    }
  } catch (error) {
    const problem = file.faulty ? notUtf8(rowAtFault(error, row)) : readingProblem(error, rowAtFault(error, row))
    if (problem === null) throw error
    if (!file.faulty) for (const its of latest.problems) problems.add(its)
    problems.add(problem)
    return result(validator.finish().totals)
  } finally {
    // The parser may have stopped in the middle: nobody reads on.
    source?.destroy()
  }
  if (file.faulty) {
    if (file.atRowStart) for (const problem of latest.problems) problems.add(problem)
    problems.add(notUtf8(file.atRowStart ? row + 1 : row))
    return result(validator.finish().totals)
  }
  for (const problem of latest.problems) problems.add(problem)
  const end = validator.finish()
  for (const problem of end.problems) problems.add(problem)
  return result(end.totals)

  function result(totals: EntrantCsvTotals): ReadEntrantCsvResult {
    return {
      totals,
      problems: problems.kept,
      problemCount: problems.count,
      notes: [...validator.headerNotes, ...notes.kept],
      noteCount: validator.headerNotes.length + notes.count,
    }
  }
}

/** The text of a strict UTF-8 stream. At bytes that are none it ends early, with the text before them. */
class StrictText {
  /** The end was such a fault. */
  faulty = false
  /** The text ended at the beginning of a row. */
  atRowStart = true

  async *pieces(bytes: AsyncIterable<Uint8Array>, options: ReadEntrantCsvOptions): AsyncGenerator<string> {
    const decoder = new TextDecoder('utf-8', { fatal: true })
    let read = 0
    for await (const chunk of bytes) {
      options.signal?.throwIfAborted()
      read += chunk.length
      const text = this.#decoded(() => decoder.decode(chunk, { stream: true })) ?? soundStart(chunk)
      if (text !== '') {
        this.atRowStart = /[\r\n]$/.test(text)
        yield text
      }
      if (this.faulty) return
      options.onProgress?.(read)
    }
    const rest = this.#decoded(() => decoder.decode())
    if (rest) yield rest
  }

  #decoded(decode: () => string): string | null {
    try {
      return decode()
    } catch {
      this.faulty = true
      return null
    }
  }
}

/** The text before the first bytes that are not UTF-8, without the rest of a character that begins in an earlier piece. */
function soundStart(chunk: Uint8Array): string {
  const begin = chunk.findIndex((byte) => (byte & 0xc0) !== 0x80)
  if (begin < 0 || begin > 3) return ''
  const text = new TextDecoder('utf-8', { ignoreBOM: true }).decode(chunk.subarray(begin))
  return text.slice(0, Math.max(0, text.indexOf('\ufffd')))
}

/** Text up to the end of the first line, as far as the longest row that is read at all. */
async function readHead(text: AsyncIterator<string>): Promise<string> {
  let head = ''
  while (!/[\r\n]/.test(head) && head.length < MAX_ROW_LENGTH) {
    const next = await text.next()
    if (next.done) break
    head += next.value
  }
  return head
}

async function* chain(first: string, rest: AsyncIterable<string>): AsyncGenerator<string> {
  if (first !== '') yield first
  yield* rest
}

/** The parser runs ahead of the rows taken from it, and its errors say how many rows it had finished. */
function rowAtFault(error: unknown, taken: number): number {
  const finished = error instanceof Error && 'records' in error ? Number(error.records) : taken
  return (Number.isInteger(finished) ? finished : taken) + 1
}

const notUtf8 = (row: number): CsvProblem => ({
  row,
  column: null,
  code: 'encoding',
  message:
    `Row ${row}: here the file is no longer UTF-8 text. Open it in your spreadsheet and save it again as "CSV UTF-8", ` +
    'then import the new file.',
})

function readingProblem(error: unknown, row: number): CsvProblem | null {
  const problem = (code: string, message: string) => ({ row, column: null, code, message })
  const code = error instanceof Error && 'code' in error ? String(error.code) : ''
  if (code === 'CSV_QUOTE_NOT_CLOSED') {
    const message = `Row ${row}: a quotation mark opens here and never closes. Close it, or take it out.`
    return problem('quote-not-closed', message)
  }
  if (code === 'CSV_MAX_RECORD_SIZE') {
    const message =
      `Row ${row}: the row is longer than 65,536 characters. A quotation mark probably opens in it and never closes; ` +
      'close it, or take it out.'
    return problem('row-too-long', message)
  }
  if (code === 'INVALID_OPENING_QUOTE' || code === 'CSV_INVALID_CLOSING_QUOTE') {
    const message =
      `Row ${row}: a quotation mark stands in the middle of a cell. Put the whole cell in quotation marks and write ` +
      'each one inside it twice, or take it out.'
    return problem('quote-misplaced', message)
  }
  return code.startsWith('CSV_') ? problem('unreadable', `Row ${row}: the row cannot be read as CSV.`) : null
}

/** The first few of many, and how many there were. */
class Kept<T> {
  readonly kept: T[] = []
  count = 0
  readonly #limit: number

  constructor(limit: number) {
    this.#limit = limit
  }

  add(item: T): void {
    this.count++
    if (this.kept.length < this.#limit) this.kept.push(item)
  }
}
