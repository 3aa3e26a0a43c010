import { concatBytes, u32 } from '../bytes/bytes.ts'
import { createHmac, type Sha256 } from '../bytes/hashing.ts'
import type { Flip, FlipStream } from './coin.ts'

/**
 * The flips of one pick in a `derived` draw (PROTOCOL section 5): the bits, most significant first, of
 * HMAC(drawKey, u32(pick) || u32(0)) || HMAC(drawKey, u32(pick) || u32(1)) || … It never runs dry in practice: 2^40
 * flips. Requires a 32-byte key and a pick from 0 to 2^32 − 1.
 */
export function derivedFlips(sha256: Sha256, drawKey: Uint8Array, pick: number): FlipStream {
  const hmac = createHmac(sha256)
  const prefix = u32(pick)
  let block = new Uint8Array(0) as Uint8Array
  let blocks = 0
  let bit = 0
  return {
    next() {
      if (bit === block.length * 8) {
        block = hmac(drawKey, concatBytes(prefix, u32(blocks)))
        blocks += 1
        bit = 0
      }
      const flip = ((block[bit >> 3] as number) >> (7 - (bit & 7))) & 1
      bit += 1
      return flip as Flip
    },
  }
}

/** One stream of flips for a whole `tossed` draw, with a place to go back to when it runs dry in mid-pick. */
export interface TossedFlips extends FlipStream {
  /** How many flips have been read. */
  position(): number
  /** Goes back to an earlier position. Throws a RangeError for any other. */
  rewind(position: number): void
}

/** The fair bits of the rounds tossed so far as a stream (PROTOCOL section 5); `next` gives -1 behind the last. */
export function tossedFlips(bits: ArrayLike<number>): TossedFlips {
  let at = 0
  return {
    next() {
      if (at >= bits.length) return -1
      const flip = bits[at] === 1 ? 1 : 0
      at += 1
      return flip
    },
    position: () => at,
    rewind(position) {
      if (!Number.isInteger(position) || position < 0 || position > at) throw new RangeError('no such earlier flip')
      at = position
    },
  }
}
