import { ed25519 } from '@noble/curves/ed25519.js'
import { p256, p384 } from '@noble/curves/nist.js'
import { concatBytes, equalBytes } from '#shared/bytes/bytes.ts'
import {
  bitStringBytes,
  der,
  derOid,
  DerError,
  DerFields,
  integerBytes,
  oidOf,
  readDer,
  TAG,
} from '#shared/timestamp/der.ts'
import { digestBy } from '#shared/timestamp/digests.ts'
import { DIGESTS, type DigestName, OID, SIGNATURES } from '#shared/timestamp/oids.ts'

/**
 * Signatures of timestamps and certificates: RSA PKCS #1 v1.5, ECDSA over P-256 and P-384, Ed25519, over SHA-256, SHA-384
 * or SHA-512. Only public values are handled here.
 */

/** Moduli that are taken, in bits: below they are weak, above they only cost time. */
const RSA_BITS = { least: 2048, most: 8192 }

/** Names a signature's algorithm, and the digest that CMS names beside it. */
export interface SignatureAlgorithm {
  readonly oid: string
  readonly digest: DigestName | null
}

export type SignatureVerdict = 'good' | 'bad' | 'unknown-algorithm'

/** Verifies a signature over `message` under a SubjectPublicKeyInfo. Never throws on bytes. */
export function verifyBySpki(
  spki: Uint8Array,
  algorithm: SignatureAlgorithm,
  message: Uint8Array,
  signature: Uint8Array,
): SignatureVerdict {
  const known = SIGNATURES[algorithm.oid]
  const digest = known?.digest ?? algorithm.digest
  if (!known || (known.digest !== null && algorithm.digest !== null && known.digest !== algorithm.digest)) {
    return 'unknown-algorithm'
  }
  try {
    const key = readSpki(spki)
    if (key.kind !== known.key) return 'unknown-algorithm'
    if (key.kind === 'ed25519') {
      return ed25519.verify(signature, message, key.bytes, { zip215: false }) ? 'good' : 'bad'
    }
    if (digest === null || digest === 'sha1') return 'unknown-algorithm'
    const hash = digestBy(digest, message)
    const good =
      key.kind === 'rsa'
        ? verifyRsa(key, digest, hash, signature)
        : (key.curve === 'p256' ? p256 : p384).verify(signature, hash, key.bytes, {
            prehash: false,
            lowS: false,
            format: 'der',
          })
    return good ? 'good' : 'bad'
  } catch (error) {
    return error instanceof UnknownKey ? 'unknown-algorithm' : 'bad'
  }
}

class UnknownKey extends Error {}

type PublicKey =
  | { readonly kind: 'rsa'; readonly modulus: bigint; readonly bytes: number; readonly exponent: bigint }
  | { readonly kind: 'ec'; readonly curve: 'p256' | 'p384'; readonly bytes: Uint8Array }
  | { readonly kind: 'ed25519'; readonly bytes: Uint8Array }

function readSpki(spki: Uint8Array): PublicKey {
  const fields = new DerFields(readDer(spki, TAG.sequence))
  const algorithm = new DerFields(fields.take(TAG.sequence))
  const bits = bitStringBytes(fields.take(TAG.bitString))
  fields.end()
  const oid = oidOf(algorithm.any())
  if (oid === OID.ed25519) return { kind: 'ed25519', bytes: bits }
  if (oid === OID.ec) {
    const curve = oidOf(algorithm.any())
    if (curve !== OID.p256 && curve !== OID.p384) throw new UnknownKey()
    return { kind: 'ec', curve: curve === OID.p256 ? 'p256' : 'p384', bytes: bits }
  }
  if (oid !== OID.rsa) throw new UnknownKey()
  const numbers = new DerFields(readDer(bits, TAG.sequence))
  const modulus = positive(integerBytes(numbers.any()))
  const exponent = positive(integerBytes(numbers.any()))
  numbers.end()
  const length = modulus.toString(2).length
  if (length < RSA_BITS.least || length > RSA_BITS.most) throw new UnknownKey()
  if (exponent < 3n || exponent % 2n === 0n || exponent > 0xffffffffn) throw new UnknownKey()
  return { kind: 'rsa', modulus, exponent, bytes: Math.ceil(length / 8) }
}

function positive(bytes: Uint8Array): bigint {
  if ((bytes[0] ?? 0) >= 0x80) throw new DerError('A number is below 0.')
  return bigOf(bytes)
}

function bigOf(bytes: Uint8Array): bigint {
  let value = 0n
  for (const byte of bytes) value = (value << 8n) | BigInt(byte)
  return value
}

/**
 * RSASSA-PKCS1-v1_5 (RFC 8017 section 8.2.2): the whole padded digest is built and compared, nothing in it is parsed.
 */
function verifyRsa(
  key: Extract<PublicKey, { kind: 'rsa' }>,
  digest: DigestName,
  hash: Uint8Array,
  signature: Uint8Array,
): boolean {
  const value = bigOf(signature)
  if (signature.length !== key.bytes || value >= key.modulus) return false
  const oid = Object.keys(DIGESTS).find((name) => DIGESTS[name] === digest) ?? ''
  const info = der(TAG.sequence, der(TAG.sequence, derOid(oid), der(TAG.nothing)), der(TAG.octetString, hash))
  const padding = new Uint8Array(key.bytes - info.length - 3).fill(0xff)
  const expected = concatBytes(Uint8Array.of(0, 1), padding, Uint8Array.of(0), info)
  let left = power(value, key.exponent, key.modulus)
  const found = new Uint8Array(key.bytes)
  for (let i = key.bytes - 1; i >= 0; i -= 1) {
    found[i] = Number(left & 0xffn)
    left >>= 8n
  }
  return equalBytes(found, expected)
}

function power(base: bigint, exponent: bigint, modulus: bigint): bigint {
  let result = 1n
  let square = base % modulus
  for (let rest = exponent; rest > 0n; rest >>= 1n) {
    if (rest & 1n) result = (result * square) % modulus
    square = (square * square) % modulus
  }
  return result
}
