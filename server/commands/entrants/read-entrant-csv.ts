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
  const text = decode(bytes, options)
  try {
    const first = await readHead(text)
    const parser = parse({
      delimiter: sniffDelimiter(first),
      bom: false,
      relax_column_count: true,
      skip_empty_lines: false,
      max_record_size: MAX_ROW_LENGTH,
    })
    const source = Readable.from(chain(first, text), { objectMode: true })
    source.on('error', (error) => parser.destroy(error))
    source.pipe(parser)
    for await (const cells of parser) {
      row++
      const result = validator.push(cells as string[], row)
      if (result.kind === 'refused') for (const problem of result.problems) problems.add(problem)
      else if (result.kind === 'entrant') {
        for (const note of result.notes) notes.add(note)
        // No await where none is due: a million turns of the event loop take longer than the rows.
        const waiting = options.onEntrant(result.entrant)
        if (waiting) await waiting
      }
    }
  } catch (error) {
    const problem = readingProblem(error, rowAtFault(error, row))
    if (problem === null) throw error
    problems.add(problem)
    return result(validator.finish().totals)
  }
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

class NotUtf8 extends Error {}

async function* decode(bytes: AsyncIterable<Uint8Array>, options: ReadEntrantCsvOptions): AsyncGenerator<string> {
  const decoder = new TextDecoder('utf-8', { fatal: true })
  let read = 0
  const text = (chunk?: Uint8Array) => {
    try {
      return chunk ? decoder.decode(chunk, { stream: true }) : decoder.decode()
    } catch {
      throw new NotUtf8()
    }
  }
  for await (const chunk of bytes) {
    options.signal?.throwIfAborted()
    read += chunk.length
    const decoded = text(chunk)
    if (decoded !== '') yield decoded
    options.onProgress?.(read)
  }
  const rest = text()
  if (rest !== '') yield rest
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

function readingProblem(error: unknown, row: number): CsvProblem | null {
  const problem = (code: string, message: string) => ({ row, column: null, code, message })
  if (error instanceof NotUtf8) {
    const message =
      `Near row ${row} the file is not UTF-8 text. Open it in your spreadsheet and save it again as "CSV UTF-8", ` +
      'then import the new file.'
    return problem('encoding', message)
  }
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
