import { sha256 } from '#server/adapters/hash/sha256.ts'
import { writeDerivedFlips } from '#server/cli/statistics/derived-flips.ts'

/** Flips of derived draws, one a byte, under keys that follow from `seed`. Requires a multiple of 8. */
export function derivedBits(seed: string, count: number): Uint8Array {
  const bits = new Uint8Array(count)
  let at = 0
  for (const bytes of writeDerivedFlips(sha256, seed, count)) {
    for (const byte of bytes) for (let bit = 7; bit >= 0; bit -= 1) bits[at++] = (byte >> bit) & 1
  }
  return bits
}
