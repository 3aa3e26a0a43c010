import { createSHA256 } from 'hash-wasm'

// For the bench only: the SHA-256 calls that a check cannot do without, by the hash of the check and nothing around them.

/** SHA-256 calls over messages of one length, and streams of so many bytes. */
export interface BareHashes {
  readonly calls: readonly { readonly count: number; readonly length: number }[]
  readonly streams: readonly number[]
}

const CHUNK = 65_536

self.addEventListener('message', (event: MessageEvent<BareHashes>) => {
  void createSHA256().then((hasher) => {
    const { calls, streams } = event.data
    const started = performance.now()
    for (const { count, length } of calls) {
      const message = new Uint8Array(length)
      for (let i = 0; i < count; i++) {
        message[i % length] = i & 0xff
        hasher.init().update(message).digest('binary')
      }
    }
    const chunk = new Uint8Array(CHUNK)
    for (const size of streams) {
      hasher.init()
      for (let at = 0; at < size; at += CHUNK) hasher.update(chunk.subarray(0, Math.min(CHUNK, size - at)))
      hasher.digest('binary')
    }
    self.postMessage(performance.now() - started)
  })
})
