import { createHmac, hkdfSync } from 'node:crypto'
import type { EncryptionKey } from './secret-box.ts'

/** Hashes of short secrets (HMAC-SHA-256, RFC 2104): without the key, which is not in the database, nobody can try them out. */
export interface KeyedHash {
  /** Lower-case hex, under the first key: what is stored. */
  of(secret: string): string
  /** Under every key, the first one's first: what a secret that was stored earlier may stand as. */
  all(secret: string): readonly string[]
}

/** `purpose` keeps hashes of different kinds of secret apart; keys are derived by HKDF-SHA-256 (RFC 5869). */
export function createKeyedHash(keys: readonly EncryptionKey[], purpose: string): KeyedHash {
  const derived = keys.map(({ key }) => Buffer.from(hkdfSync('sha256', key, '', `evenpenny-hash/1 ${purpose}`, 32)))
  const [first] = derived
  if (!first) throw new Error('There must be an encryption key.')
  const hash = (key: Buffer, secret: string) => createHmac('sha256', key).update(secret).digest('hex')
  return { of: (secret) => hash(first, secret), all: (secret) => derived.map((key) => hash(key, secret)) }
}
