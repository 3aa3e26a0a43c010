import { createHash } from 'node:crypto'
import type { Entropy } from '#server/adapters/entropy/entropy.ts'

/** A secret for a link: 256 bits, 43 characters of A-Z a-z 0-9 - _. */
export const newToken = (entropy: Entropy): string => Buffer.from(entropy.bytes(32)).toString('base64url')

/** What the database keeps of a token. It has 256 bits of its own, so a plain hash is enough. */
export const tokenHash = (token: string): string => createHash('sha256').update(token).digest('hex')
