import { fail, ok, type Failure, type Result } from '../bytes/result.ts'

/** Why bytes are not lines. */
export type LinesCode = 'unfinished-line' | 'empty-line'

/** Splits bytes into lines that each end with one line feed; the feeds are left out. No bytes are no lines. */
export function splitLines(bytes: Uint8Array): Result<readonly Uint8Array[], Failure<LinesCode>> {
  const lines: Uint8Array[] = []
  for (let start = 0; start < bytes.length; ) {
    const end = bytes.indexOf(0x0a, start)
    const at = `line ${lines.length + 1}`
    if (end < 0) return fail('unfinished-line', at, 'The last line has no line feed.')
    if (end === start) return fail('empty-line', at, 'An empty line stands here.')
    lines.push(bytes.subarray(start, end))
    start = end + 1
  }
  return ok(lines)
}
