import { assertBytes, concatBytes, put } from './bytes.ts'

/**
 * SHA-256 (FIPS 180-4): 32 fresh bytes for any byte string. Injected everywhere, so that each place brings its
 * fastest one. It must not keep or change `data`: callers reuse their buffers.
 */
export type Sha256 = (data: Uint8Array) => Uint8Array

/** HMAC-SHA-256 over an injected hash. */
export type Hmac = (key: Uint8Array, message: Uint8Array) => Uint8Array

const BLOCK = 64
const DIGEST = 32

/**
 * HMAC-SHA-256 (RFC 2104). The returned function keeps its two buffers, so that a million calls allocate nothing but
 * their results. Keys of any length; throws a TypeError for anything but bytes.
 */
export function createHmac(sha256: Sha256): Hmac {
  let inner = new Uint8Array(BLOCK + 128)
  const outer = new Uint8Array(BLOCK + DIGEST)
  return (key, message) => {
    assertBytes(key, 'key')
    assertBytes(message, 'message')
    if (BLOCK + message.length > inner.length) inner = new Uint8Array(BLOCK + 2 * message.length)
    const block = key.length > BLOCK ? sha256(key) : key
    inner.fill(0x36, 0, BLOCK)
    outer.fill(0x5c, 0, BLOCK)
    for (let i = 0; i < block.length; i += 1) {
      inner[i] = (block[i] as number) ^ 0x36
      outer[i] = (block[i] as number) ^ 0x5c
    }
    put(inner, BLOCK, message)
    put(outer, BLOCK, sha256(inner.subarray(0, BLOCK + message.length)))
    return sha256(outer)
  }
}

/** HMAC-SHA-256 (RFC 2104) of one message. */
export function hmacSha256(sha256: Sha256, key: Uint8Array, message: Uint8Array): Uint8Array {
  return createHmac(sha256)(key, message)
}

/**
 * HKDF-SHA-256 (RFC 5869): extract (section 2.2), then expand (section 2.3). `length` from 1 to 8,160 bytes; throws a
 * RangeError otherwise. An empty salt stands for 32 zero bytes, which HMAC pads alike.
 */
export function hkdfSha256(
  sha256: Sha256,
  input: { readonly salt: Uint8Array; readonly ikm: Uint8Array; readonly info: Uint8Array; readonly length: number },
): Uint8Array {
  const { salt, ikm, info, length } = input
  if (!Number.isInteger(length) || length < 1 || length > 255 * DIGEST) throw new RangeError('HKDF length out of range')
  const hmac = createHmac(sha256)
  const prk = hmac(salt, ikm)
  const okm = new Uint8Array(Math.ceil(length / DIGEST) * DIGEST)
  let block: Uint8Array = new Uint8Array(0)
  for (let i = 0; i * DIGEST < length; i += 1) {
    block = hmac(prk, concatBytes(block, info, Uint8Array.of(i + 1)))
    okm.set(block, i * DIGEST)
  }
  return okm.subarray(0, length)
}
