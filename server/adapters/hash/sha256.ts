import { hash } from 'node:crypto'
import type { Sha256 } from '#shared/bytes/hashing.ts'

/** SHA-256 by Node's one-shot hash, the quickest for short messages that Node brings. */
export const sha256: Sha256 = (data) => hash('sha256', data, 'buffer')
