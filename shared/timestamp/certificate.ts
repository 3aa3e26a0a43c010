import { fromBase64 } from '#shared/bytes/base64.ts'
import { equalBytes } from '#shared/bytes/bytes.ts'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import {
  bitStringBytes,
  booleanOf,
  childrenOf,
  context,
  type Der,
  DerError,
  DerFields,
  expectTag,
  integerBytes,
  oidOf,
  readDer,
  TAG,
  timeOf,
  wholeOf,
} from '#shared/timestamp/der.ts'
import { OID } from '#shared/timestamp/oids.ts'
import { verifyBySpki } from '#shared/timestamp/verify-signature.ts'

/** X.509 certificates (RFC 5280), as far as timestamps need them. Times in seconds since 1970. */
export interface Certificate {
  readonly der: Uint8Array
  readonly serial: Uint8Array
  /** Names as their DER: they are compared byte for byte. */
  readonly issuer: Uint8Array
  readonly subject: Uint8Array
  /** What people call the subject: its common name, else its organisation. */
  readonly name: string
  readonly notBefore: number
  readonly notAfter: number
  readonly spki: Uint8Array
  readonly signed: Uint8Array
  readonly signatureOid: string
  readonly signature: Uint8Array
  readonly authority: { readonly pathLength: number | null } | null
  /** null: the certificate does not say what its key is for. The bits of RFC 5280 section 4.2.1.3. */
  readonly keyUsage: { readonly digitalSignature: boolean; readonly certSign: boolean } | null
  readonly purposes: { readonly critical: boolean; readonly oids: readonly string[] } | null
  readonly subjectKeyId: Uint8Array | null
  /** Holds a critical extension that is not understood here: such a certificate is trusted for nothing. */
  readonly unknownCritical: boolean
}

/** Larger ones are not looked at. */
export const MAX_CERTIFICATE_BYTES = 16 * 1024

/** Reads a certificate. Throws a DerError. */
export function parseCertificate(bytes: Uint8Array): Certificate {
  if (bytes.length > MAX_CERTIFICATE_BYTES) throw new DerError('A certificate is too long.')
  const outer = new DerFields(readDer(bytes, TAG.sequence))
  const body = outer.take(TAG.sequence)
  const algorithm = outer.take(TAG.sequence)
  const signature = bitStringBytes(outer.take(TAG.bitString))
  outer.end()
  const fields = new DerFields(body)
  fields.optional(context(0))
  const serial = integerBytes(fields.take(TAG.integer))
  if (!equalBytes(fields.take(TAG.sequence).whole, algorithm.whole)) {
    throw new DerError('A certificate names two algorithms for its signature.')
  }
  const issuer = fields.take(TAG.sequence).whole
  const validity = new DerFields(fields.take(TAG.sequence))
  const subject = fields.take(TAG.sequence)
  const spki = fields.take(TAG.sequence).whole
  fields.optional(context(1, 'primitive'))
  fields.optional(context(2, 'primitive'))
  const extensions = fields.optional(context(3))
  fields.end()
  return {
    der: bytes,
    serial,
    issuer,
    subject: subject.whole,
    name: nameOf(subject),
    notBefore: timeOf(validity.any()).seconds,
    notAfter: timeOf(validity.any()).seconds,
    spki,
    signed: body.whole,
    signatureOid: oidOf(new DerFields(algorithm).any()),
    signature,
    ...readExtensions(extensions),
  }
}

type Extensions = Pick<Certificate, 'authority' | 'keyUsage' | 'purposes' | 'subjectKeyId' | 'unknownCritical'>

function readExtensions(wrapped: Der | null): Extensions {
  const found: { -readonly [K in keyof Extensions]: Extensions[K] } = {
    authority: null,
    keyUsage: null,
    purposes: null,
    subjectKeyId: null,
    unknownCritical: false,
  }
  if (wrapped === null) return found
  const seen = new Set<string>()
  for (const extension of childrenOf(readDer(wrapped.content, TAG.sequence))) {
    const fields = new DerFields(extension)
    const oid = oidOf(fields.any())
    const flag = fields.optional(TAG.boolean)
    const critical = flag !== null && booleanOf(flag)
    const value = fields.take(TAG.octetString).content
    fields.end()
    if (seen.has(oid)) throw new DerError('A certificate has an extension twice.')
    seen.add(oid)
    switch (oid) {
      case OID.basicConstraints: {
        const limits = new DerFields(readDer(value, TAG.sequence))
        const authority = limits.optional(TAG.boolean)
        const length = limits.optional(TAG.integer)
        limits.end()
        if (authority !== null && booleanOf(authority)) {
          found.authority = { pathLength: length === null ? null : wholeOf(length) }
        }
        break
      }
      case OID.keyUsage: {
        const bits = readDer(value, TAG.bitString).content
        const first = bits[1] ?? 0
        found.keyUsage = { digitalSignature: (first & 0xc0) !== 0, certSign: (first & 0x04) !== 0 }
        break
      }
      case OID.extendedKeyUsage:
        found.purposes = { critical, oids: childrenOf(readDer(value, TAG.sequence)).map(oidOf) }
        break
      case OID.subjectKeyId:
        found.subjectKeyId = readDer(value, TAG.octetString).content
        break
      case OID.certificatePolicies:
        // Any policy will do: who trusts the authority's certificate has looked at its policies.
        break
      default:
        found.unknownCritical ||= critical
    }
  }
  return found
}

/** The first common name of a distinguished name, else its organisation, else nothing. */
function nameOf(subject: Der): string {
  const names = new Map<string, string>()
  for (const set of childrenOf(subject)) {
    for (const pair of childrenOf(expectTag(set, TAG.set))) {
      const fields = new DerFields(pair)
      const oid = oidOf(fields.any())
      const text = decodeUtf8(fields.any().content)
      if (text !== null && !names.has(oid)) names.set(oid, text.replace(/[\p{Cc}\p{Bidi_Control}]/gu, '\ufffd'))
    }
  }
  return (names.get(OID.commonName) ?? names.get(OID.organisation) ?? '').slice(0, 200)
}

/** Whether `issuer` may have issued and did sign `certificate`, with `below` authorities between it and the signer. */
export function issuedBy(certificate: Certificate, issuer: Certificate, below: number): boolean {
  const { authority, keyUsage } = issuer
  if (!equalBytes(certificate.issuer, issuer.subject) || issuer.unknownCritical) return false
  if (authority === null || (authority.pathLength !== null && authority.pathLength < below)) return false
  if (keyUsage !== null && !keyUsage.certSign) return false
  const algorithm = { oid: certificate.signatureOid, digest: null }
  return verifyBySpki(issuer.spki, algorithm, certificate.signed, certificate.signature) === 'good'
}

const BLOCK = /-----BEGIN CERTIFICATE-----\s([A-Za-z0-9+/=\s]+?)-----END CERTIFICATE-----/g

/** Every certificate of a PEM text (RFC 7468), others left out. Throws a DerError for one that cannot be read. */
export function certificatesOfPem(pem: string): readonly Certificate[] {
  return [...pem.matchAll(BLOCK)].map(([, body]) => {
    const bytes = fromBase64((body ?? '').replace(/\s/g, ''))
    if (bytes === null) throw new DerError('A certificate is not base64.')
    return parseCertificate(bytes)
  })
}
