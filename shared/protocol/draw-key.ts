import { concatBytes, u32, utf8 } from '../bytes/bytes.ts'
import { hkdfSha256, type Sha256 } from '../bytes/hashing.ts'

/** What a `derived` draw's flips come from (PROTOCOL section 5). A source that the seal does not name is null. */
export interface DrawKeyInput {
  /** 32 bytes. */
  readonly sealDigest: Uint8Array
  /** 32 bytes. */
  readonly seed: Uint8Array
  /** The round's 32 bytes. */
  readonly beaconRandomness: Uint8Array | null
  /** The fair bits of all rounds, each 0 or 1. */
  readonly tossBits: ArrayLike<number> | null
}

/** HKDF(salt = sealDigest, ikm = seed || randomness || tosses, info = "evenpenny/1 draw"), 32 bytes (section 5). */
export function deriveDrawKey(sha256: Sha256, input: DrawKeyInput): Uint8Array {
  const { sealDigest, seed, beaconRandomness, tossBits } = input
  for (const part of [sealDigest, seed, beaconRandomness]) {
    if (part !== null && part.length !== 32) throw new RangeError('seal digest, seed and randomness have 32 bytes')
  }
  const ikm = [seed]
  if (beaconRandomness !== null) ikm.push(beaconRandomness)
  if (tossBits !== null) ikm.push(tossDigest(sha256, tossBits))
  return hkdfSha256(sha256, { salt: sealDigest, ikm: concatBytes(...ikm), info: utf8('evenpenny/1 draw'), length: 32 })
}

/** SHA256(0x06 || u32(bit count) || bits, most significant first, padded with 0) (section 5). */
export function tossDigest(sha256: Sha256, bits: ArrayLike<number>): Uint8Array {
  const packed = new Uint8Array(Math.ceil(bits.length / 8))
  for (let i = 0; i < bits.length; i += 1) {
    if (bits[i] === 1) packed[i >> 3] = (packed[i >> 3] as number) | (0x80 >> (i & 7))
  }
  return sha256(concatBytes(Uint8Array.of(6), u32(bits.length), packed))
}
