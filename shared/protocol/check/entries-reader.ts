import type { Failure, Result } from '#shared/bytes/result.ts'
import { type EntriesCode, EntriesParser } from '#shared/protocol/entries-csv.ts'
import { MAX_ENTRANTS } from '#shared/protocol/limits.ts'

/** A list as it was read, sound or not: step 4 judges it. */
export interface ReadEntries {
  /** Tickets, and 32 bytes of commitment, leaf by leaf, up to the end or the first fault. */
  readonly tickets: Float64Array
  readonly entryCommits: Uint8Array
  readonly outcome: Result<{ readonly count: number; readonly tickets: number }, Failure<EntriesCode>>
}

export interface EntriesReader {
  push(chunk: Uint8Array): void
  end(): ReadEntries
}

/** Shortest line of a list: a digit, a comma, 64 hex digits, a line feed. */
const SHORTEST_LINE = 67

/** Reads entries.csv as it streams by. `size` is its length in bytes; 40 bytes a leaf are kept. */
export function createEntriesReader(size: number): EntriesReader {
  const room = Math.min(MAX_ENTRANTS, Math.ceil(size / SHORTEST_LINE))
  const tickets = new Float64Array(room)
  const entryCommits = new Uint8Array(32 * room)
  let count = 0
  const parser = new EntriesParser((held, commit) => {
    tickets[count] = held
    entryCommits.set(commit, 32 * count)
    count++
  })
  return {
    push: (chunk) => void parser.push(chunk),
    end: () => ({
      tickets: tickets.subarray(0, count),
      entryCommits: entryCommits.subarray(0, 32 * count),
      outcome: parser.end(),
    }),
  }
}
