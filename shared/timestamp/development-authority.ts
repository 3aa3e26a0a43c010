import { p256 } from '@noble/curves/nist.js'
import { equalBytes, utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes } from '#shared/bytes/hex.ts'
import { formatTime } from '#shared/bytes/time.ts'
import { type Certificate, certificatesOfPem } from '#shared/timestamp/certificate.ts'
import { context, der, derInteger, derOid, TAG } from '#shared/timestamp/der.ts'
import { digestBy } from '#shared/timestamp/digests.ts'
import { ECDSA_SHA256_OID, OID, SHA256_OID } from '#shared/timestamp/oids.ts'
import { imprintDer, type TimestampRequest } from '#shared/timestamp/request.ts'

/**
 * The development authority. Its key stands here for all to see, as the development chain's secret does, so that its
 * timestamps show nothing: a check lets them pass only where it is told to, and says so.
 */

/** The certificate that a check would have to trust (P-256, 2020 to 2099). */
export const DEVELOPMENT_AUTHORITY_PEM = `-----BEGIN CERTIFICATE-----
MIIBzTCCAXSgAwIBAgIBATAKBggqhkjOPQQDAjBMMR4wHAYDVQQKDBVFdmVucGVu
bnkgZGV2ZWxvcG1lbnQxKjAoBgNVBAMMIURldmVsb3BtZW50IGF1dGhvcml0eSAt
IHdvcnRobGVzczAgFw0yMDAxMDEwMDAwMDBaGA8yMDk5MTIzMTIzNTk1OVowTDEe
MBwGA1UECgwVRXZlbnBlbm55IGRldmVsb3BtZW50MSowKAYDVQQDDCFEZXZlbG9w
bWVudCBhdXRob3JpdHkgLSB3b3J0aGxlc3MwWTATBgcqhkjOPQIBBggqhkjOPQMB
BwNCAARY5xHbALEHxv7Rx8tj52SutRGry4wEWUoLF4MhucVLQE3CDJio6Q8g7eZ+
8G2/K7dLcZjJQIf6cYtF1cr0AiYvo0UwQzASBgNVHRMBAf8ECDAGAQH/AgEAMA4G
A1UdDwEB/wQEAwICBDAdBgNVHQ4EFgQUpWVNnG9pzA4yoX8CzfFzTwwptTkwCgYI
KoZIzj0EAwIDRwAwRAIgaHdfIlGzp9qpbkFSTmbSoQcVVDjwef+ZlMjG3zYHVXIC
IAjWzdaixA9RT6axvJ3euGL5V8tqH90aLfflAYEl+H99
-----END CERTIFICATE-----
`

/** The certificate of the key that signs, issued by it, for timestamps only. */
const SIGNER_PEM = `-----BEGIN CERTIFICATE-----
MIICATCCAaigAwIBAgIBAjAKBggqhkjOPQQDAjBMMR4wHAYDVQQKDBVFdmVucGVu
bnkgZGV2ZWxvcG1lbnQxKjAoBgNVBAMMIURldmVsb3BtZW50IGF1dGhvcml0eSAt
IHdvcnRobGVzczAgFw0yMDAxMDEwMDAwMDBaGA8yMDk5MTIzMTIzNTk1OVowTTEe
MBwGA1UECgwVRXZlbnBlbm55IGRldmVsb3BtZW50MSswKQYDVQQDDCJEZXZlbG9w
bWVudCB0aW1lc3RhbXBzIC0gd29ydGhsZXNzMFkwEwYHKoZIzj0CAQYIKoZIzj0D
AQcDQgAExkGNd3arZEYcD0jgA69fwfQ7O+UDHAIUxbfvmi61pBMHFlbdPmy4JsDL
REGnRua8oImB4TeEKcfGJ8lHYs+aHKN4MHYwDAYDVR0TAQH/BAIwADAOBgNVHQ8B
Af8EBAMCB4AwFgYDVR0lAQH/BAwwCgYIKwYBBQUHAwgwHQYDVR0OBBYEFHFJgfGQ
uivQxwt8HqUds8lIMXDoMB8GA1UdIwQYMBaAFKVlTZxvacwOMqF/As3xc08MKbU5
MAoGCCqGSM49BAMCA0cAMEQCIG/JJfnT5PorC62NzYitQ3VCaIWJ0/Wafek4vDuC
9QMuAiAgQGUqjw9Dj+KSL8wHOuaZHP4ddCVy7G23dQUJl4Pz1g==
-----END CERTIFICATE-----
`

const SIGNER_KEY = '070e33a82dc01765c3dd389d5d2704fbabbd203ec069a2c2647cb09e3e31bca5'

/** An identifier that names no real policy: below the arc for private use. */
const POLICY = '1.3.6.1.4.1.99999.3161.1'

const one = (pem: string): Certificate => {
  const [certificate] = certificatesOfPem(pem)
  if (!certificate) throw new Error('the development authority has no certificate')
  return certificate
}
export const DEVELOPMENT_AUTHORITY: Certificate = one(DEVELOPMENT_AUTHORITY_PEM)
const SIGNER: Certificate = one(SIGNER_PEM)

/** Whether a certificate is the development authority's, or that of the key that signs for it. */
export const isDevelopmentAuthority = (certificate: Certificate): boolean =>
  [DEVELOPMENT_AUTHORITY, SIGNER].some((known) => equalBytes(known.spki, certificate.spki))

/**
 * Answers a request with a TimeStampResp (RFC 3161 section 2.4.2) for the second `genTime`, in seconds since 1970.
 * `serial` is a number that no other answer has.
 */
export function signDevelopmentTimestamp(request: TimestampRequest, genTime: number, serial: number): Uint8Array {
  const null_ = der(TAG.nothing)
  const sha256 = der(TAG.sequence, derOid(SHA256_OID), null_)
  const number = (value: number) => derInteger(hexBytes(value.toString(16).padStart(14, '0')))
  const attribute = (oid: string, value: Uint8Array) => der(TAG.sequence, derOid(oid), der(TAG.set, value))
  const info = der(
    TAG.sequence,
    number(1),
    derOid(POLICY),
    imprintDer(request.imprint),
    number(serial),
    der(TAG.generalizedTime, utf8(formatTime(genTime).replace(/[-:T]/g, ''))),
    der(TAG.sequence, number(1)),
    ...(request.nonce === null ? [] : [derInteger(request.nonce)]),
  )
  const named = der(
    TAG.sequence,
    der(TAG.sequence, der(TAG.sequence, der(TAG.octetString, digestBy('sha256', SIGNER.der)))),
  )
  // In the order of DER's SET OF, shorter ones first here: their lengths differ (X.690 section 11.6).
  const attributes = [
    attribute(OID.contentType, derOid(OID.tstInfo)),
    attribute(OID.messageDigest, der(TAG.octetString, digestBy('sha256', info))),
    attribute(OID.signingCertificateV2, named),
  ]
  const signature = p256.sign(der(TAG.set, ...attributes), hexBytes(SIGNER_KEY, 32), { format: 'der', lowS: false })
  const signer = der(
    TAG.sequence,
    number(1),
    der(TAG.sequence, SIGNER.issuer, derInteger(SIGNER.serial)),
    sha256,
    der(context(0), ...attributes),
    der(TAG.sequence, derOid(ECDSA_SHA256_OID)),
    der(TAG.octetString, signature),
  )
  const data = der(
    TAG.sequence,
    number(3),
    der(TAG.set, sha256),
    der(TAG.sequence, derOid(OID.tstInfo), der(context(0), der(TAG.octetString, info))),
    ...(request.certificates ? [der(context(0), SIGNER.der)] : []),
    der(TAG.set, signer),
  )
  const token = der(TAG.sequence, derOid(OID.signedData), der(context(0), data))
  return der(TAG.sequence, der(TAG.sequence, number(0)), token)
}

/** Refuses a request: status 2, rejection, with words (RFC 3161 section 2.4.2). */
export function refuseTimestamp(words: string): Uint8Array {
  const text = der(TAG.sequence, der(TAG.utf8, utf8(words)))
  return der(TAG.sequence, der(TAG.sequence, derInteger(Uint8Array.of(2)), text))
}
