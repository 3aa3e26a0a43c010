import { createCipheriv, createDecipheriv } from 'node:crypto'

/** AES-256-GCM (NIST SP 800-38D) with a 96-bit nonce and a 128-bit tag. */

export const nonceLength = 12
export const tagLength = 16

export interface GcmInput {
  /** 32 bytes. */
  readonly key: Uint8Array
  /** 12 bytes, never the same twice under one key. */
  readonly nonce: Uint8Array
  /** Authenticated, not encrypted. */
  readonly associated: Uint8Array
}

/** @returns ciphertext with the 16-byte tag behind it. */
export function gcmSeal({ key, nonce, associated }: GcmInput, plaintext: Uint8Array): Uint8Array {
  const cipher = createCipheriv('aes-256-gcm', key, nonce, { authTagLength: tagLength })
  cipher.setAAD(associated)
  return new Uint8Array(Buffer.concat([cipher.update(plaintext), cipher.final(), cipher.getAuthTag()]))
}

/** @returns undefined if the tag does not fit: nothing of the plaintext is given out then. */
export function gcmOpen({ key, nonce, associated }: GcmInput, sealed: Uint8Array): Uint8Array | undefined {
  if (sealed.length < tagLength) return undefined
  const decipher = createDecipheriv('aes-256-gcm', key, nonce, { authTagLength: tagLength })
  decipher.setAAD(associated)
  decipher.setAuthTag(sealed.subarray(sealed.length - tagLength))
  try {
    const plaintext = decipher.update(sealed.subarray(0, sealed.length - tagLength))
    return new Uint8Array(Buffer.concat([plaintext, decipher.final()]))
  } catch {
    return undefined
  }
}
