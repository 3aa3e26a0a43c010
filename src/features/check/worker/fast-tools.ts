import { createSHA256, type IHasher } from 'hash-wasm'
import type { StreamingHash } from '#shared/archive/sums.ts'
import { equalBytes, utf8 } from '#shared/bytes/bytes.ts'
import { type CheckTools, portableTools } from '#shared/protocol/check/tools.ts'

/** What hashes: WebAssembly where the browser allows it, plain JavaScript elsewhere. */
export type HashEngine = 'webassembly' | 'javascript'

export interface BrowserTools {
  readonly tools: CheckTools
  readonly engine: HashEngine
}

/** Digests that may be under way at the same time before the slower hash steps in. */
const STREAMS = 4

/**
 * Tools for a check in a browser. In Chromium the WebAssembly hash takes a quarter of the time of the one in JavaScript
 * (41 and 81 bytes: 2.0 to 2.7 million digests a second against 0.5 to 0.7), and on a phone that is what one waits for.
 */
export async function browserTools(): Promise<BrowserTools> {
  const portable = portableTools(() => performance.now())
  let hashers: IHasher[]
  try {
    hashers = await Promise.all(Array.from({ length: STREAMS + 1 }, () => createSHA256()))
  } catch {
    // A policy that forbids WebAssembly, or a browser that has none.
    return { tools: portable, engine: 'javascript' }
  }
  const [whole, ...idle] = hashers
  if (!whole) return { tools: portable, engine: 'javascript' }
  const sha256 = (bytes: Uint8Array) => whole.init().update(bytes).digest('binary')
  const probe = utf8('Two hashes that agree')
  if (!equalBytes(sha256(probe), portable.sha256(probe))) return { tools: portable, engine: 'javascript' }
  const tools: CheckTools = {
    sha256,
    createSha256: () => {
      const hasher = idle.pop()
      return hasher ? streaming(hasher, () => idle.push(hasher)) : portable.createSha256()
    },
    now: portable.now,
  }
  return { tools, engine: 'webassembly' }
}

function streaming(hasher: IHasher, giveBack: () => void): StreamingHash {
  hasher.init()
  return {
    update: (bytes) => void hasher.update(bytes),
    digest: () => {
      const digest = hasher.digest('binary')
      giveBack()
      return digest
    },
  }
}
