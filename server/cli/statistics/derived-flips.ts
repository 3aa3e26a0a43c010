import { hmacSha256, type Sha256 } from '#shared/bytes/hashing.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { derivedFlips } from '#shared/sampling/flips.ts'

/** A draw of the sample has so many picks, and each pick so many flips: several blocks of its stream. */
const PICKS = 50
const FLIPS = 1000

/**
 * The flips of derived draws (PROTOCOL section 5), eight a byte, the first in the highest bit: 1,000 from each of 50 picks
 * of draw after draw, whose keys follow from `seed`. So faults within a stream, between the picks of a draw and between
 * draws would all show. Requires `count` to be a multiple of 8.
 */
export function* writeDerivedFlips(sha256: Sha256, seed: string, count: number): Generator<Uint8Array> {
  if (count % 8 !== 0) throw new RangeError('whole bytes are written: a multiple of 8')
  let left = count
  for (let draw = 0; left > 0; draw += 1) {
    const drawKey = hmacSha256(sha256, utf8(seed), utf8(`draw ${draw}`))
    for (let pick = 0; pick < PICKS && left > 0; pick += 1) {
      const stream = derivedFlips(sha256, drawKey, pick)
      const bytes = new Uint8Array(Math.min(FLIPS, left) / 8)
      for (let i = 0; i < bytes.length * 8; i += 1) {
        if (stream.next() === 1) bytes[i >> 3] = (bytes[i >> 3] as number) | (0x80 >> (i & 7))
      }
      left -= bytes.length * 8
      yield bytes
    }
  }
}
