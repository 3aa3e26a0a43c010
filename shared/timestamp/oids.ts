/** Object identifiers of timestamps, signatures and certificates, each with where it is defined. */
export const OID = {
  /** RFC 5652 section 5.1. */
  signedData: '1.2.840.113549.1.7.2',
  /** RFC 3161 section 2.4.2. */
  tstInfo: '1.2.840.113549.1.9.16.1.4',
  /** RFC 5652 sections 11.1 and 11.2. */
  contentType: '1.2.840.113549.1.9.3',
  messageDigest: '1.2.840.113549.1.9.4',
  /** RFC 2634 section 5.4, RFC 5035 section 3. */
  signingCertificate: '1.2.840.113549.1.9.16.2.12',
  signingCertificateV2: '1.2.840.113549.1.9.16.2.47',
  /** RFC 5280 sections 4.2.1.2 to 4.2.1.12. */
  subjectKeyId: '2.5.29.14',
  keyUsage: '2.5.29.15',
  basicConstraints: '2.5.29.19',
  certificatePolicies: '2.5.29.32',
  extendedKeyUsage: '2.5.29.37',
  timeStamping: '1.3.6.1.5.5.7.3.8',
  /** X.520. */
  commonName: '2.5.4.3',
  organisation: '2.5.4.10',
  /** RFC 8017 appendix C, RFC 5480 section 2.1.1, RFC 8410 section 3. */
  rsa: '1.2.840.113549.1.1.1',
  ec: '1.2.840.10045.2.1',
  p256: '1.2.840.10045.3.1.7',
  p384: '1.3.132.0.34',
  ed25519: '1.3.101.112',
} as const

export type DigestName = 'sha1' | 'sha256' | 'sha384' | 'sha512'

/** RFC 5754 section 2; SHA-1, of RFC 3370, only where RFC 2634 names a certificate by it. */
export const DIGESTS: Readonly<Record<string, DigestName>> = {
  '1.3.14.3.2.26': 'sha1',
  '2.16.840.1.101.3.4.2.1': 'sha256',
  '2.16.840.1.101.3.4.2.2': 'sha384',
  '2.16.840.1.101.3.4.2.3': 'sha512',
}
export const SHA256_OID = '2.16.840.1.101.3.4.2.1'

/** Signature algorithms: the kind of key, and the digest where the algorithm names it (RFC 5754 section 3, RFC 8410). */
export const SIGNATURES: Readonly<
  Record<string, { readonly key: 'rsa' | 'ec' | 'ed25519'; readonly digest: DigestName | null }>
> = {
  '1.2.840.113549.1.1.1': { key: 'rsa', digest: null },
  '1.2.840.113549.1.1.11': { key: 'rsa', digest: 'sha256' },
  '1.2.840.113549.1.1.12': { key: 'rsa', digest: 'sha384' },
  '1.2.840.113549.1.1.13': { key: 'rsa', digest: 'sha512' },
  '1.2.840.10045.4.3.2': { key: 'ec', digest: 'sha256' },
  '1.2.840.10045.4.3.3': { key: 'ec', digest: 'sha384' },
  '1.2.840.10045.4.3.4': { key: 'ec', digest: 'sha512' },
  '1.3.101.112': { key: 'ed25519', digest: null },
}
export const ECDSA_SHA256_OID = '1.2.840.10045.4.3.2'
