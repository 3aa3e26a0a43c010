import { createHash } from 'node:crypto'
import { performance } from 'node:perf_hooks'
import { setImmediate } from 'node:timers/promises'
import type { StreamingHash } from '#shared/archive/sums.ts'
import type { CheckTools } from '#shared/protocol/check/tools.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'

/** SHA-256 over pieces, by OpenSSL. */
export function createSha256(): StreamingHash {
  const hash = createHash('sha256')
  return { update: (bytes) => void hash.update(bytes), digest: () => hash.digest() }
}

/** What a check needs, as Node brings it. */
export const nodeCheckTools: CheckTools = {
  sha256,
  createSha256,
  now: () => performance.now(),
  pause: () => setImmediate(),
}
