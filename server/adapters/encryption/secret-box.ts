import { type Entropy, systemEntropy } from '../entropy/entropy.ts'
import { gcmOpen, gcmSeal, nonceLength, tagLength } from './aes-gcm.ts'

/** Encryption of small secrets at rest: seeds, blinding keys, mails that wait. */

export interface EncryptionKey {
  /** 1 to 32 of a-z, 0-9 and the hyphen; stands in clear text with every secret. */
  readonly id: string
  /** 32 bytes. */
  readonly key: Uint8Array
}

export type SecretErrorCode = 'malformed' | 'unknown-key' | 'refused'

/** A stored secret that cannot be opened. Its message names the key, never the content. */
export class SecretError extends Error {
  constructor(
    readonly code: SecretErrorCode,
    message: string,
  ) {
    super(message)
    this.name = 'SecretError'
  }
}

export interface SecretBox {
  /**
   * Encrypts under the first key. `context` says what the secret is and whose ("seal-seed:41"): it is bound as
   * associated data, so that a secret put in another's place does not open.
   */
  seal(secret: Uint8Array, context: string): Uint8Array
  /** Decrypts under the key that the secret names. Throws a SecretError. */
  open(sealed: Uint8Array, context: string): Uint8Array
  /** Whether the secret is under another key than the first, and should be sealed anew. */
  isOld(sealed: Uint8Array): boolean
}

const version = 1

/**
 * Stored form: version (1 byte), length of the key's id (1), id, nonce (12, random: SP 800-38D section 8.2.2 allows
 * 2^32 secrets a key), ciphertext, tag (16).
 * @param keys the first encrypts, all decrypt. Throws an Error if there is none, an id is taken twice or a key is not
 *   of 32 bytes.
 */
export function createSecretBox(keys: readonly EncryptionKey[], entropy: Entropy = systemEntropy): SecretBox {
  const byId = new Map<string, Uint8Array>()
  for (const { id, key } of keys) {
    if (!/^[a-z0-9-]{1,32}$/.test(id)) throw new Error(`The id of an encryption key must be a-z, 0-9 and "-": "${id}".`)
    if (key.length !== 32) throw new Error(`The encryption key "${id}" must have 32 bytes; it has ${key.length}.`)
    if (byId.has(id)) throw new Error(`There are two encryption keys with the id "${id}".`)
    byId.set(id, Uint8Array.from(key))
  }
  const [first] = byId
  if (!first) throw new Error('There must be an encryption key.')
  const [firstId, firstKey] = first

  const read = (sealed: Uint8Array) => {
    const idLength = sealed[1] ?? 0
    const nonceAt = 2 + idLength
    if (sealed[0] !== version || idLength < 1 || sealed.length < nonceAt + nonceLength + tagLength)
      throw new SecretError('malformed', 'A stored secret is not in the form that this version writes.')
    return {
      id: Buffer.from(sealed.subarray(2, nonceAt)).toString('latin1'),
      nonce: sealed.subarray(nonceAt, nonceAt + nonceLength),
      content: sealed.subarray(nonceAt + nonceLength),
    }
  }

  return {
    seal(secret, context) {
      const nonce = entropy.bytes(nonceLength)
      const content = gcmSeal({ key: firstKey, nonce, associated: associatedData(firstId, context) }, secret)
      const head = Buffer.from([version, firstId.length])
      return new Uint8Array(Buffer.concat([head, Buffer.from(firstId), nonce, content]))
    },
    open(sealed, context) {
      const { id, nonce, content } = read(sealed)
      const key = byId.get(id)
      if (!key)
        throw new SecretError(
          'unknown-key',
          `A secret is encrypted under the key "${id}", which is not among the configured ones. Put it back into EVENPENNY_ENCRYPTION_KEYS.`,
        )
      const secret = gcmOpen({ key, nonce, associated: associatedData(id, context) }, content)
      if (!secret)
        throw new SecretError(
          'refused',
          `A secret under the key "${id}" does not open as ${context}: it was changed or moved, or the key of this id is another one.`,
        )
      return secret
    },
    isOld: (sealed) => read(sealed).id !== firstId,
  }
}

/** The id cannot hold a line feed, so no two pairs of id and context give the same bytes. */
const associatedData = (id: string, context: string) => Buffer.from(`evenpenny-secret/${version}\n${id}\n${context}`)
