import { equalBytes } from '#shared/bytes/bytes.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import { formatTime } from '#shared/bytes/time.ts'
import { type Certificate, issuedBy, parseCertificate } from '#shared/timestamp/certificate.ts'
import { DerError } from '#shared/timestamp/der.ts'
import { digestBy } from '#shared/timestamp/digests.ts'
import { OID } from '#shared/timestamp/oids.ts'
import {
  parseTimestampResponse,
  type SignerInfo,
  type TimestampInfo,
  type TimestampToken,
} from '#shared/timestamp/token.ts'
import { verifyBySpki } from '#shared/timestamp/verify-signature.ts'

/** Why bytes are no timestamp of a digest. */
export type TimestampCode =
  | 'timestamp-malformed'
  | 'timestamp-refused'
  | 'timestamp-imprint'
  | 'timestamp-nonce'
  | 'timestamp-attributes'
  | 'timestamp-algorithm'
  | 'timestamp-signature'
  | 'timestamp-certificate'
  | 'timestamp-expired'

export interface TimestampQuestion {
  /** SHA-256 of what was timestamped, 32 bytes. */
  readonly imprint: Uint8Array
  /** Certificates that the asker trusts: of authorities, or of those who issued theirs. */
  readonly trusted: readonly Certificate[]
  /** What the request brought, where the answer is to one's own request. */
  readonly nonce?: Uint8Array
}

/** A timestamp whose signature is good. */
export interface VerifiedTimestamp {
  readonly info: TimestampInfo
  /** The signer's certificate. */
  readonly signer: Certificate
  /** The trusted certificate to which the signer's leads; null: whose timestamp it is, nobody here vouches for. */
  readonly trustedBy: Certificate | null
}

/** Authorities between the signer and a trusted certificate, at most. */
const MAX_BETWEEN = 3

/**
 * Verifies a TimeStampResp over a digest: RFC 3161 section 2.4.2, with the signer's certificate for timestamps only
 * (section 2.3), named by the signed attributes (RFC 5035), and valid at the time that it states. That nobody whom the
 * asker trusts vouches for the signer is not a failure: `trustedBy` is then null.
 */
export function verifyTimestamp(
  bytes: Uint8Array,
  question: TimestampQuestion,
): Result<VerifiedTimestamp, Failure<TimestampCode>> {
  try {
    const answer = parseTimestampResponse(bytes)
    if (answer.kind === 'refused') {
      const words = answer.words === '' ? '' : ` It says: ${answer.words}`
      return fail('timestamp-refused', 'status', `The authority gave no timestamp (status ${answer.status}).${words}`)
    }
    return verifyToken(answer.token, question)
  } catch (error) {
    if (error instanceof DerError) return fail('timestamp-malformed', '', error.message)
    throw error
  }
}

function verifyToken(
  token: TimestampToken,
  question: TimestampQuestion,
): Result<VerifiedTimestamp, Failure<TimestampCode>> {
  const { info, signer } = token
  if (info.imprintDigest !== 'sha256' || !equalBytes(info.imprint, question.imprint)) {
    return fail('timestamp-imprint', 'messageImprint', 'It is a timestamp of something else.')
  }
  if (question.nonce !== undefined && (info.nonce === null || !sameNumber(info.nonce, question.nonce))) {
    return fail('timestamp-nonce', 'nonce', 'It does not answer this request, but another one.')
  }
  if (signer.digest === null) return fail('timestamp-algorithm', 'digestAlgorithm', 'Its digest is not one known here.')
  if (signer.contentType !== OID.tstInfo) {
    return fail('timestamp-attributes', 'contentType', 'Its signature is over another kind of content.')
  }
  if (signer.messageDigest === null || !equalBytes(signer.messageDigest, digestBy(signer.digest, token.content))) {
    return fail('timestamp-attributes', 'messageDigest', 'Its signature is over other content than it holds.')
  }
  const included = token.certificates.map(parseCertificate)
  const certificate = [...included, ...question.trusted].find((held) => isMeant(held, signer))
  if (!certificate) return fail('timestamp-certificate', 'certificates', 'It holds no certificate of its signer.')
  const named =
    signer.certificateDigests.length > 0 &&
    signer.certificateDigests.every(
      ({ digest, value }) => digest !== null && equalBytes(digestBy(digest, certificate.der), value),
    )
  if (!named) {
    return fail('timestamp-attributes', 'signingCertificate', 'Its signed attributes do not name its certificate.')
  }
  const algorithm = { oid: signer.signatureOid, digest: signer.digest }
  const verdict = verifyBySpki(certificate.spki, algorithm, signer.signed, signer.signature)
  if (verdict === 'unknown-algorithm') {
    return fail('timestamp-algorithm', 'signatureAlgorithm', 'Its signature is of a kind that is not known here.')
  }
  if (verdict === 'bad') {
    return fail('timestamp-signature', 'signature', `It is not signed by ${nameFor(certificate)}.`)
  }
  const purpose = purposeProblem(certificate)
  if (purpose !== null) return fail('timestamp-certificate', 'certificates', purpose)
  if (!validAt(certificate, info.genTime)) {
    const words = `The certificate of ${nameFor(certificate)} was not valid at ${formatTime(info.genTime)}.`
    return fail('timestamp-expired', 'genTime', words)
  }
  return ok({ info, signer: certificate, trustedBy: trustOf(certificate, included, question.trusted, info.genTime, 0) })
}

const nameFor = (certificate: Certificate): string => certificate.name || 'its signer'

const validAt = (certificate: Certificate, seconds: number): boolean =>
  certificate.notBefore <= seconds && seconds <= certificate.notAfter

function isMeant(certificate: Certificate, signer: SignerInfo): boolean {
  const meant = signer.certificate
  if ('subjectKeyId' in meant) {
    return certificate.subjectKeyId !== null && equalBytes(certificate.subjectKeyId, meant.subjectKeyId)
  }
  return equalBytes(certificate.issuer, meant.issuer) && equalBytes(certificate.serial, meant.serial)
}

/** RFC 3161 section 2.3: for timestamps, for nothing else, and marked critical. */
function purposeProblem(certificate: Certificate): string | null {
  const { purposes, keyUsage } = certificate
  const only = purposes?.critical === true && purposes.oids.length === 1 && purposes.oids[0] === OID.timeStamping
  if (!only) return `The certificate of ${nameFor(certificate)} is not for timestamps alone.`
  if (keyUsage !== null && !keyUsage.digitalSignature) {
    return `The certificate of ${nameFor(certificate)} is not for signatures.`
  }
  return certificate.unknownCritical ? 'Its certificate has a critical extension that is not known here.' : null
}

/** The trusted certificate to which one leads, each link signed and valid at the time; null where there is none. */
function trustOf(
  certificate: Certificate,
  included: readonly Certificate[],
  trusted: readonly Certificate[],
  time: number,
  between: number,
): Certificate | null {
  for (const anchor of trusted) {
    if (equalBytes(anchor.der, certificate.der)) return anchor
    if (validAt(anchor, time) && issuedBy(certificate, anchor, between)) return anchor
  }
  if (between === MAX_BETWEEN) return null
  for (const issuer of included) {
    if (issuer === certificate || !validAt(issuer, time) || !issuedBy(certificate, issuer, between)) continue
    const anchor = trustOf(issuer, included, trusted, time, between + 1)
    if (anchor !== null) return anchor
  }
  return null
}

function sameNumber(left: Uint8Array, right: Uint8Array): boolean {
  const bare = (bytes: Uint8Array) => bytes.subarray(bytes.findIndex((byte) => byte !== 0))
  return equalBytes(bare(left), bare(right))
}
