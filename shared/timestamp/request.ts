import {
  der,
  derInteger,
  derOid,
  DerError,
  DerFields,
  integerBytes,
  oidOf,
  readDer,
  booleanOf,
  TAG,
  wholeOf,
} from '#shared/timestamp/der.ts'
import { SHA256_OID } from '#shared/timestamp/oids.ts'

/** Requests for timestamps (RFC 3161 section 2.4.1), always over SHA-256. */
export interface TimestampRequest {
  /** SHA-256 of what is to be timestamped, 32 bytes. */
  readonly imprint: Uint8Array
  /** Bytes of a number that is not negative, which the answer must repeat; null: none. */
  readonly nonce: Uint8Array | null
  /** Whether the answer shall bring the authority's certificates. */
  readonly certificates: boolean
}

/** A messageImprint over SHA-256. */
export const imprintDer = (imprint: Uint8Array): Uint8Array =>
  der(TAG.sequence, der(TAG.sequence, derOid(SHA256_OID), der(TAG.nothing)), der(TAG.octetString, imprint))

/** Writes a request. */
export function timestampRequest({ imprint, nonce, certificates }: TimestampRequest): Uint8Array {
  if (imprint.length !== 32) throw new RangeError('an imprint of SHA-256 has 32 bytes')
  return der(
    TAG.sequence,
    derInteger(Uint8Array.of(1)),
    imprintDer(imprint),
    ...(nonce === null ? [] : [derInteger(nonce)]),
    ...(certificates ? [der(TAG.boolean, Uint8Array.of(0xff))] : []),
  )
}

/** Reads a request over SHA-256, whatever policy it asks for. Throws a DerError. */
export function parseTimestampRequest(bytes: Uint8Array): TimestampRequest {
  const fields = new DerFields(readDer(bytes, TAG.sequence))
  if (wholeOf(fields.any()) !== 1) throw new DerError('The request has another version than 1.')
  const digest = new DerFields(fields.take(TAG.sequence))
  if (oidOf(new DerFields(digest.take(TAG.sequence)).any()) !== SHA256_OID) {
    throw new DerError('The request is over another digest than SHA-256.')
  }
  const imprint = digest.take(TAG.octetString).content
  if (imprint.length !== 32) throw new DerError('An imprint of SHA-256 has 32 bytes.')
  fields.optional(TAG.oid)
  const nonce = fields.optional(TAG.integer)
  const certificates = fields.optional(TAG.boolean)
  fields.end()
  return {
    imprint,
    nonce: nonce === null ? null : integerBytes(nonce),
    certificates: certificates !== null && booleanOf(certificates),
  }
}
