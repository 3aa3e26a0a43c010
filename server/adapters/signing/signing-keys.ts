import { createPrivateKey, createPublicKey, type KeyObject, sign } from 'node:crypto'
import { decodeSpki, encodePem, keyFingerprint } from '#shared/protocol/signature.ts'
import { sha256 } from '../hash/sha256.ts'

/** One Ed25519 key of the site (RFC 8032). */
export interface SigningKey {
  /** SHA-256 of the SubjectPublicKeyInfo DER, hex: what seals call `key`. */
  readonly fingerprint: string
  /** 32 raw bytes. */
  readonly publicKey: Uint8Array
  /** `site-key.pem`. */
  readonly publicKeyPem: string
  /** 64 bytes over exactly these bytes. */
  sign(message: Uint8Array): Uint8Array
}

/** The site's keys: the current one signs new seals; a retired one still signs the results of its own seals. */
export interface SigningKeys {
  readonly current: SigningKey
  readonly all: readonly SigningKey[]
  /** The key of this fingerprint, current or retired. */
  find(fingerprint: string): SigningKey | undefined
}

/**
 * Reads a private key from PKCS #8 PEM. Throws an Error that says what to do if it is not an unencrypted Ed25519 one.
 */
export function readSigningKey(pem: string): SigningKey {
  let key: KeyObject
  try {
    key = createPrivateKey(pem)
  } catch {
    throw new Error(
      'The signing key cannot be read. It must be an unencrypted PKCS #8 PEM; make one with: openssl genpkey -algorithm ed25519',
    )
  }
  if (key.asymmetricKeyType !== 'ed25519')
    throw new Error(
      `The signing key is of type ${key.asymmetricKeyType}; it must be Ed25519. Make one with: openssl genpkey -algorithm ed25519`,
    )
  const publicKey = decodeSpki(new Uint8Array(createPublicKey(key).export({ type: 'spki', format: 'der' })))
  if (!publicKey) throw new Error('The public half of the signing key is not in the form of RFC 8410.')
  return {
    fingerprint: keyFingerprint(sha256, publicKey),
    publicKey,
    publicKeyPem: encodePem(publicKey),
    sign: (message) => new Uint8Array(sign(null, message, key)),
  }
}

export function createSigningKeys(currentPem: string, retiredPems: readonly string[]): SigningKeys {
  const current = readSigningKey(currentPem)
  const all = [current, ...retiredPems.map(readSigningKey)]
  const byFingerprint = new Map(all.map((key) => [key.fingerprint, key]))
  if (byFingerprint.size !== all.length) throw new Error('The same signing key is given twice, as current or retired.')
  return { current, all, find: (fingerprint) => byFingerprint.get(fingerprint) }
}
