import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import {
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
import { DIGESTS, type DigestName, OID } from '#shared/timestamp/oids.ts'

/** Timestamps as their bytes say them (RFC 3161 section 2.4.2, RFC 5652 section 5); nothing is verified here. */
export interface TimestampToken {
  readonly info: TimestampInfo
  /** TSTInfo's bytes: what was signed, through its digest. */
  readonly content: Uint8Array
  readonly signer: SignerInfo
  /** Certificates as DER, in the order in which they stand. */
  readonly certificates: readonly Uint8Array[]
}

export interface TimestampInfo {
  readonly policy: string
  readonly imprintDigest: DigestName | null
  readonly imprint: Uint8Array
  /** Hex. */
  readonly serial: string
  /** Seconds since 1970 of genTime, its fraction cut off. */
  readonly genTime: number
  /** genTime with its fraction and accuracy, rounded up: the thing existed at this second, whatever the accuracy. */
  readonly latest: number
  /** Bytes of the number that the request brought. */
  readonly nonce: Uint8Array | null
}

export interface SignerInfo {
  /** Which certificate is meant: by issuer and serial number, or by subject key identifier. */
  readonly certificate:
    | { readonly issuer: Uint8Array; readonly serial: Uint8Array }
    | { readonly subjectKeyId: Uint8Array }
  readonly digest: DigestName | null
  readonly signatureOid: string
  readonly signature: Uint8Array
  /** What is signed: the attributes, written as a SET. */
  readonly signed: Uint8Array
  readonly contentType: string | null
  readonly messageDigest: Uint8Array | null
  /** Digests of the signer's certificate among the signed attributes (RFC 2634, RFC 5035). */
  readonly certificateDigests: readonly { readonly digest: DigestName | null; readonly value: Uint8Array }[]
}

/** What an authority answered: a timestamp, or why there is none. */
export type TimestampAnswer =
  | { readonly kind: 'granted'; readonly token: TimestampToken }
  | { readonly kind: 'refused'; readonly status: number; readonly words: string }

/** Answers have 2 to 8 KiB. */
export const MAX_RESPONSE_BYTES = 64 * 1024
const MAX_CERTIFICATES = 10

/** Reads a TimeStampResp. Throws a DerError where it is none. */
export function parseTimestampResponse(bytes: Uint8Array): TimestampAnswer {
  if (bytes.length > MAX_RESPONSE_BYTES) throw new DerError(`A timestamp has at most ${MAX_RESPONSE_BYTES} bytes.`)
  const fields = new DerFields(readDer(bytes, TAG.sequence))
  const info = new DerFields(fields.take(TAG.sequence))
  const status = wholeOf(info.any())
  const text = info.optional(TAG.sequence)
  info.optional(TAG.bitString)
  info.end()
  // granted, and granted with changes (RFC 3161 section 2.4.2).
  if (status > 1) {
    const words = (text === null ? [] : childrenOf(text)).map((line) => decodeUtf8(line.content) ?? '').join(' ')
    return { kind: 'refused', status, words: words.slice(0, 500) }
  }
  const token = readToken(fields.take(TAG.sequence))
  fields.end()
  return { kind: 'granted', token }
}

function readToken(contentInfo: Der): TimestampToken {
  const outer = new DerFields(contentInfo)
  if (oidOf(outer.any()) !== OID.signedData) throw new DerError('A timestamp is signed data.')
  const data = new DerFields(readDer(outer.take(context(0)).content, TAG.sequence))
  outer.end()
  integerBytes(data.any())
  data.take(TAG.set)
  const inner = new DerFields(data.take(TAG.sequence))
  if (oidOf(inner.any()) !== OID.tstInfo) throw new DerError('What is signed is no timestamp.')
  const { content } = readDer(inner.take(context(0)).content, TAG.octetString)
  inner.end()
  const held = data.optional(context(0))
  data.optional(context(1))
  const signers = childrenOf(data.take(TAG.set))
  data.end()
  const [signer] = signers
  if (!signer || signers.length !== 1) throw new DerError('A timestamp has exactly one signer.')
  const certificates = held === null ? [] : childrenOf(held)
  if (certificates.length > MAX_CERTIFICATES) throw new DerError('A timestamp has too many certificates.')
  return {
    info: readInfo(content),
    content,
    signer: readSigner(signer),
    // Attribute certificates and other forms have another tag, and are passed over.
    certificates: certificates.filter(({ tag }) => tag === TAG.sequence).map(({ whole }) => whole),
  }
}

function readInfo(content: Uint8Array): TimestampInfo {
  const fields = new DerFields(readDer(content, TAG.sequence))
  if (wholeOf(fields.any()) !== 1) throw new DerError('The timestamp has another version than 1.')
  const policy = oidOf(fields.any())
  const digest = new DerFields(fields.take(TAG.sequence))
  const algorithm = oidOf(new DerFields(digest.take(TAG.sequence)).any())
  const imprint = digest.take(TAG.octetString).content
  digest.end()
  const serial = toHex(integerBytes(fields.any()))
  const time = timeOf(fields.take(TAG.generalizedTime))
  const accuracy = fields.optional(TAG.sequence)
  const ordering = fields.optional(TAG.boolean)
  if (ordering !== null) booleanOf(ordering)
  const nonce = fields.optional(TAG.integer)
  fields.optional(context(0))
  const extensions = fields.optional(context(1))
  fields.end()
  if (extensions !== null) refuseCritical(extensions)
  return {
    policy,
    imprintDigest: DIGESTS[algorithm] ?? null,
    imprint,
    serial,
    genTime: time.seconds,
    latest: Math.ceil(time.seconds + time.fraction + (accuracy === null ? 0 : secondsOfAccuracy(accuracy))),
    nonce: nonce === null ? null : integerBytes(nonce),
  }
}

function secondsOfAccuracy(accuracy: Der): number {
  const fields = new DerFields(accuracy)
  const seconds = fields.optional(TAG.integer)
  const parts = [fields.optional(context(0, 'primitive')), fields.optional(context(1, 'primitive'))]
  fields.end()
  const [millis = 0, micros = 0] = parts.map((part) => (part === null ? 0 : wholeOf({ ...part, tag: TAG.integer })))
  if (millis > 999 || micros > 999) throw new DerError('An accuracy is not one.')
  return (seconds === null ? 0 : wholeOf(seconds)) + millis / 1000 + micros / 1_000_000
}

function refuseCritical(extensions: Der): void {
  for (const extension of childrenOf(extensions)) {
    const fields = new DerFields(extension)
    fields.take(TAG.oid)
    const critical = fields.optional(TAG.boolean)
    if (critical !== null && booleanOf(critical))
      throw new DerError('The timestamp has an extension that is not known.')
  }
}

function readSigner(node: Der): SignerInfo {
  const fields = new DerFields(node)
  wholeOf(fields.any())
  const keyId = fields.optional(context(0, 'primitive'))
  const certificate = keyId === null ? issuerAndSerial(fields.take(TAG.sequence)) : { subjectKeyId: keyId.content }
  const digest = DIGESTS[oidOf(new DerFields(fields.take(TAG.sequence)).any())] ?? null
  const attributes = fields.take(context(0))
  const signatureOid = oidOf(new DerFields(fields.take(TAG.sequence)).any())
  const signature = fields.take(TAG.octetString).content
  fields.optional(context(1))
  fields.end()
  // RFC 5652 section 5.4: signed with the tag of a SET in the place of [0].
  const signed = attributes.whole.slice()
  signed[0] = TAG.set
  return { certificate, digest, signatureOid, signature, signed, ...readAttributes(attributes) }
}

function issuerAndSerial(node: Der) {
  const fields = new DerFields(node)
  const issuer = fields.take(TAG.sequence).whole
  const serial = integerBytes(fields.any())
  fields.end()
  return { issuer, serial }
}

function readAttributes(attributes: Der): Pick<SignerInfo, 'contentType' | 'messageDigest' | 'certificateDigests'> {
  const found = new Map<string, Der>()
  for (const attribute of childrenOf(attributes)) {
    const fields = new DerFields(attribute)
    const oid = oidOf(fields.any())
    const values = childrenOf(fields.take(TAG.set))
    fields.end()
    const [value] = values
    if (!value || values.length !== 1 || found.has(oid)) throw new DerError('A signed attribute has not one value.')
    found.set(oid, value)
  }
  const contentType = found.get(OID.contentType)
  const messageDigest = found.get(OID.messageDigest)
  const byV1 = found.get(OID.signingCertificate)
  const byV2 = found.get(OID.signingCertificateV2)
  return {
    contentType: contentType === undefined ? null : oidOf(contentType),
    messageDigest: messageDigest === undefined ? null : expectTag(messageDigest, TAG.octetString).content,
    certificateDigests: [
      ...(byV1 === undefined ? [] : [firstCertificate(byV1, 'sha1')]),
      ...(byV2 === undefined ? [] : [firstCertificate(byV2, 'sha256')]),
    ],
  }
}

/** The first of the certificates that the attribute names is the signer's. */
function firstCertificate(node: Der, usual: DigestName) {
  const [first] = childrenOf(new DerFields(node).take(TAG.sequence))
  if (!first) throw new DerError('A signed attribute names no certificate.')
  const fields = new DerFields(first)
  const algorithm = fields.optional(TAG.sequence)
  const digest = algorithm === null ? usual : (DIGESTS[oidOf(new DerFields(algorithm).any())] ?? null)
  return { digest, value: fields.take(TAG.octetString).content }
}
