import type { StreamingHash } from '#shared/archive/sums.ts'
import { concatBytes } from '#shared/bytes/bytes.ts'
import { StepFailure } from '#shared/protocol/check/failure.ts'

/** No line of a transcript is longer: 21 coins, each with two counts and what flips ever come out. */
const MAX_LINE = 2 ** 20

/**
 * The lines of a member as it streams by, each with its line feed; a last one may lack it. All bytes go into `digest`.
 * Memory grows with the longest line only.
 */
export async function* memberLines(
  chunks: AsyncIterable<Uint8Array>,
  digest: StreamingHash,
): AsyncGenerator<Uint8Array, void, undefined> {
  let rest = new Uint8Array(0) as Uint8Array
  let count = 0
  for await (const chunk of chunks) {
    digest.update(chunk)
    let start = 0
    for (let end = chunk.indexOf(0x0a); end !== -1; end = chunk.indexOf(0x0a, start)) {
      const line = chunk.subarray(start, end + 1)
      yield rest.length === 0 ? line : concatBytes(rest, line)
      rest = rest.subarray(0, 0)
      start = end + 1
      count++
    }
    if (start === chunk.length) continue
    rest = concatBytes(rest, chunk.subarray(start))
    if (rest.length > MAX_LINE) {
      throw new StepFailure(
        'member-too-long',
        `transcript.jsonl line ${count + 1}`,
        'No line of a transcript is so long.',
      )
    }
  }
  if (rest.length > 0) yield rest
}
