import { utf8 } from '../bytes/bytes.ts'
import { toHex } from '../bytes/hex.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { MAX_ENTRANTS, MAX_TICKETS, MAX_TICKETS_EACH } from './limits.ts'

/** `entries.csv` (PROTOCOL section 9): a header, then a line for each leaf in order. */

const HEADER = utf8('tickets,entry_commit\n')
const HEX_DIGITS = utf8('0123456789abcdef')
const LF = 0x0a
const COMMA = 0x2c
/** Value of a lower-case hex digit by its byte; 0x1000 for any other, so that it shows in whatever it is joined with. */
const NIBBLES = Uint16Array.from({ length: 256 }, (_, byte) =>
  byte >= 0x30 && byte <= 0x39 ? byte - 0x30 : byte >= 0x61 && byte <= 0x66 ? byte - 0x57 : 0x1000,
)

/** Why bytes are not an `entries.csv`. `at` of the failure names the line, from 1. */
export type EntriesCode =
  | 'header-wrong'
  | 'line-wrong'
  | 'tickets-out-of-range'
  | 'total-out-of-range'
  | 'too-many'
  | 'empty'
  | 'unfinished-line'

/** The header line's bytes. */
export function entriesHeader(): Uint8Array {
  return HEADER.slice()
}

/** One line of text for a leaf, with its line feed. `entryCommit` has 32 bytes. */
export function entriesLine(tickets: number, entryCommit: Uint8Array): string {
  return `${tickets},${toHex(entryCommit)}\n`
}

/** The whole file for leaves in their order; `entryCommits` holds 32 bytes a leaf. */
export function writeEntries(tickets: ArrayLike<number>, entryCommits: Uint8Array): Uint8Array {
  // At most 10 digits, a comma, 64 hex digits and a line feed a leaf.
  const bytes = new Uint8Array(HEADER.length + tickets.length * 76)
  bytes.set(HEADER)
  let at = HEADER.length
  for (let leaf = 0; leaf < tickets.length; leaf += 1) {
    const count = String(tickets[leaf])
    for (let i = 0; i < count.length; i += 1) bytes[at++] = count.charCodeAt(i)
    bytes[at++] = COMMA
    for (let i = leaf * 32; i < leaf * 32 + 32; i += 1) {
      const byte = entryCommits[i] as number
      bytes[at++] = HEX_DIGITS[byte >> 4] as number
      bytes[at++] = HEX_DIGITS[byte & 15] as number
    }
    bytes[at++] = LF
  }
  return bytes.subarray(0, at)
}

/** Receives a leaf. `entryCommit` is the parser's own buffer: copy what must stay. */
export type LeafSink = (tickets: number, entryCommit: Uint8Array) => void

/**
 * Parses `entries.csv` as it streams by: decimal without leading zeros, a comma, 64 lower-case hex
 * digits, a line feed, also after the last line. Counts are 1 to 2^32 − 1, the total at most 2^53 − 1, the leaves at
 * most 2,000,000. Feed chunks in order; the first failure stands and everything later is ignored.
 */
export class EntriesParser {
  private readonly commit = new Uint8Array(32)
  private failure: Failure<EntriesCode> | null = null
  private headerRead = 0
  private line = 2
  private tickets = 0
  private digits = 0
  /** Hex digits read in this line, or -1 while before the comma. */
  private nibbles = -1
  private total = 0

  constructor(private readonly sink: LeafSink) {}

  /** Takes the next bytes; the first failure so far, or null. */
  push(chunk: Uint8Array): Failure<EntriesCode> | null {
    for (let i = 0; i < chunk.length && this.failure === null; ) {
      const next = this.wholeLine(chunk, i)
      if (next > i) i = next
      else this.byte(chunk[i++] as number)
    }
    return this.failure
  }

  /** Ends the file: how many leaves and tickets passed, or the first failure. */
  end(): Result<{ readonly count: number; readonly tickets: number }, Failure<EntriesCode>> {
    if (this.failure === null) {
      if (this.headerRead < HEADER.length) this.refuse('header-wrong', 'The file does not begin with its header.')
      else if (this.digits > 0) this.refuse('unfinished-line', 'The last line has no line feed.')
      else if (this.line === 2) this.refuse('empty', 'The file has no entry.')
    }
    return this.failure === null
      ? ok({ count: this.line - 2, tickets: this.total })
      : { ok: false, error: this.failure }
  }

  /**
   * Takes a line that stands whole and faultless in the chunk, and says where the next one begins; 0 where it does not,
   * and then nothing has been taken. `byte` gives the same for any line, and says what is wrong with it.
   */
  private wholeLine(chunk: Uint8Array, start: number): number {
    if (this.headerRead < HEADER.length || this.digits > 0 || this.nibbles >= 0) return 0
    let at = start
    let tickets = 0
    for (let digit = chunk[at]; digit !== undefined && digit >= 0x30 && digit <= 0x39; digit = chunk[at]) {
      tickets = tickets * 10 + digit - 0x30
      at += 1
      if (at - start > 10) return 0
    }
    if (at === start || chunk[start] === 0x30 || tickets > MAX_TICKETS_EACH || chunk[at] !== COMMA) return 0
    at += 1
    if (chunk[at + 64] !== LF) return 0
    const { commit } = this
    let wrong = 0
    for (let i = 0; i < 32; i += 1, at += 2) {
      const value = ((NIBBLES[chunk[at] as number] as number) << 4) | (NIBBLES[chunk[at + 1] as number] as number)
      wrong |= value
      commit[i] = value
    }
    if (wrong > 0xff) return 0
    this.tickets = tickets
    this.leaf()
    return at + 1
  }

  private byte(byte: number): void {
    if (this.headerRead < HEADER.length) {
      if (byte !== HEADER[this.headerRead]) this.refuse('header-wrong', 'The first line is not tickets,entry_commit.')
      this.headerRead += 1
    } else if (this.nibbles < 0) this.inTickets(byte)
    else this.inCommit(byte)
  }

  private inTickets(byte: number): void {
    if (byte === COMMA && this.digits > 0) {
      this.nibbles = 0
      return
    }
    if (byte < 0x30 || byte > 0x39) return this.refuse('line-wrong', 'A decimal number and a comma were expected.')
    if (byte === 0x30 && this.digits === 0) {
      return this.refuse('tickets-out-of-range', 'A count is at least 1 and has no leading zero.')
    }
    this.tickets = this.tickets * 10 + byte - 0x30
    this.digits += 1
    if (this.tickets > MAX_TICKETS_EACH) this.refuse('tickets-out-of-range', 'An entrant has at most 2^32 − 1 tickets.')
  }

  private inCommit(byte: number): void {
    if (this.nibbles === 64) {
      if (byte !== LF) return this.refuse('line-wrong', 'A line feed was expected after 64 hex digits.')
      return this.leaf()
    }
    const value = byte >= 0x30 && byte <= 0x39 ? byte - 0x30 : byte >= 0x61 && byte <= 0x66 ? byte - 0x57 : -1
    if (value < 0) return this.refuse('line-wrong', '64 lower-case hex digits were expected.')
    const at = this.nibbles >> 1
    this.commit[at] = this.nibbles % 2 === 0 ? value << 4 : (this.commit[at] as number) | value
    this.nibbles += 1
  }

  private leaf(): void {
    this.total += this.tickets
    if (this.total > MAX_TICKETS) return this.refuse('total-out-of-range', 'All tickets together pass 2^53 − 1.')
    if (this.line - 2 >= MAX_ENTRANTS) return this.refuse('too-many', `A draw has at most ${MAX_ENTRANTS} entrants.`)
    this.sink(this.tickets, this.commit)
    this.line += 1
    this.tickets = 0
    this.digits = 0
    this.nibbles = -1
  }

  private refuse(code: EntriesCode, message: string): void {
    const line = this.headerRead < HEADER.length ? 1 : this.line
    this.failure = fail(code, `line ${line}`, message).error
  }
}

/** Leaves of a parsed `entries.csv`: 32 bytes a leaf in `entryCommits`. */
export interface Entries {
  readonly tickets: Float64Array
  readonly entryCommits: Uint8Array
  readonly total: number
}

/** Parses a whole `entries.csv` in memory; the rules of `EntriesParser`. */
export function parseEntries(bytes: Uint8Array): Result<Entries, Failure<EntriesCode>> {
  // A line has at least 1 digit, a comma, 64 hex digits and a line feed.
  const room = Math.min(MAX_ENTRANTS, Math.ceil(bytes.length / 67))
  const tickets = new Float64Array(room)
  const entryCommits = new Uint8Array(room * 32)
  let count = 0
  const parser = new EntriesParser((held, commit) => {
    tickets[count] = held
    entryCommits.set(commit, count * 32)
    count += 1
  })
  parser.push(bytes)
  const end = parser.end()
  if (!end.ok) return end
  const leaves = end.value.count
  return ok({
    tickets: tickets.subarray(0, leaves),
    entryCommits: entryCommits.subarray(0, leaves * 32),
    total: end.value.tickets,
  })
}
