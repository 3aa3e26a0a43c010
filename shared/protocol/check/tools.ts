import { sha256 as nobleSha256 } from '@noble/hashes/sha2.js'
import type { StreamingHash } from '#shared/archive/sums.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'

/** What a check needs of the machine that it runs on. */
export interface CheckTools {
  readonly sha256: Sha256
  createSha256(): StreamingHash
  /** Milliseconds of any steady clock: only differences are told. */
  now(): number
  /** Lets the machine turn to other work now and then; called some dozens of times a second at most. */
  pause?(): Promise<void>
}

/** Tools in plain JavaScript, for wherever nothing faster is at hand. */
export function portableTools(now: () => number): CheckTools {
  return { sha256: (bytes) => nobleSha256(bytes), createSha256: () => nobleSha256.create(), now }
}
