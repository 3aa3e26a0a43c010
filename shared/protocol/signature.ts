import { ed25519 } from '@noble/curves/ed25519.js'
import { fromBase64, toBase64 } from '../bytes/base64.ts'
import { concatBytes, decodeUtf8, equalBytes, utf8 } from '../bytes/bytes.ts'
import { hexBytes, toHex } from '../bytes/hex.ts'
import type { Sha256 } from '../bytes/hashing.ts'

/** Ed25519 signatures (RFC 8032) and the site's key as SubjectPublicKeyInfo (RFC 8410); PROTOCOL section 9. */

/** SEQUENCE { SEQUENCE { OID 1.3.101.112 }, BIT STRING of 32 bytes }: everything before the key (RFC 8410, 4). */
const SPKI_PREFIX = hexBytes('302a300506032b6570032100')
const PEM_HEAD = '-----BEGIN PUBLIC KEY-----\n'
const PEM_TAIL = '\n-----END PUBLIC KEY-----\n'

/** A raw 32-byte public key as SubjectPublicKeyInfo DER, 44 bytes. */
export function encodeSpki(publicKey: Uint8Array): Uint8Array {
  if (publicKey.length !== 32) throw new RangeError('an Ed25519 public key has 32 bytes')
  return concatBytes(SPKI_PREFIX, publicKey)
}

/** The raw key of a SubjectPublicKeyInfo DER, or null where it is not exactly an Ed25519 key's. */
export function decodeSpki(der: Uint8Array): Uint8Array | null {
  if (der.length !== 44 || !equalBytes(der.subarray(0, SPKI_PREFIX.length), SPKI_PREFIX)) return null
  return der.slice(SPKI_PREFIX.length)
}

/** `site-key.pem` (RFC 7468): three lines, each with a line feed, as OpenSSL writes it. */
export function encodePem(publicKey: Uint8Array): string {
  return `${PEM_HEAD}${toBase64(encodeSpki(publicKey))}${PEM_TAIL}`
}

/** The raw key of a `site-key.pem`, or null where the bytes are not exactly what `encodePem` writes. */
export function decodePem(bytes: Uint8Array): Uint8Array | null {
  const text = decodeUtf8(bytes)
  if (text === null || !text.startsWith(PEM_HEAD) || !text.endsWith(PEM_TAIL)) return null
  const der = fromBase64(text.slice(PEM_HEAD.length, -PEM_TAIL.length))
  const key = der === null ? null : decodeSpki(der)
  return key !== null && equalBytes(utf8(encodePem(key)), bytes) ? key : null
}

/** What a seal calls `key` and what the site prints: SHA-256 of the key's SubjectPublicKeyInfo DER, in hex. */
export function keyFingerprint(sha256: Sha256, publicKey: Uint8Array): string {
  return toHex(sha256(encodeSpki(publicKey)))
}

/** Whether 32 bytes are a key that may sign: a canonical point that is not of small order (section 9). */
export function isSoundPublicKey(publicKey: Uint8Array): boolean {
  if (publicKey.length !== 32) return false
  try {
    // `false` refuses coordinates of 2^255 − 19 and more (RFC 8032 section 5.1.3).
    const point = ed25519.Point.fromBytes(publicKey, false)
    return !point.isSmallOrder() && equalBytes(point.toBytes(), publicKey)
  } catch {
    return false
  }
}

/**
 * Whether a 64-byte signature over exactly these bytes is good under a raw public key (RFC 8032 section 5.1.7). False
 * for a small-order or non-canonical key, a non-canonical R or an S beyond the group's order; never throws on bytes.
 */
export function verifySignature(publicKey: Uint8Array, message: Uint8Array, signature: Uint8Array): boolean {
  if (signature.length !== 64 || !isSoundPublicKey(publicKey)) return false
  try {
    return ed25519.verify(signature, message, publicKey, { zip215: false })
  } catch {
    return false
  }
}

/** Signs bytes with a 32-byte secret (RFC 8032 section 5.1.6); 64 bytes. */
export function signBytes(secretKey: Uint8Array, message: Uint8Array): Uint8Array {
  return ed25519.sign(message, secretKey)
}

/** The raw public key of a 32-byte secret. */
export function publicKeyOf(secretKey: Uint8Array): Uint8Array {
  return ed25519.getPublicKey(secretKey)
}
