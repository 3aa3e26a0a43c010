import { createHash } from 'node:crypto'
import { createReadStream } from 'node:fs'
import { stat } from 'node:fs/promises'
import { Readable } from 'node:stream'

/** Bytes to store, which can be read more than once, with what they must be. */
export interface PutSource {
  /** Bytes. */
  readonly size: number
  /** Hex. */
  readonly sha256: string
  open(): AsyncIterable<Uint8Array>
}

export function sourceOfBytes(bytes: Uint8Array): PutSource {
  return {
    size: bytes.length,
    sha256: createHash('sha256').update(bytes).digest('hex'),
    open: () => Readable.from([Buffer.from(bytes)]),
  }
}

/** A file; it is read once to learn its digest. */
export async function sourceOfFile(path: string): Promise<PutSource> {
  const digest = await digestOf(createReadStream(path))
  return { ...digest, size: (await stat(path)).size, open: () => createReadStream(path) }
}

export async function digestOf(stream: AsyncIterable<Uint8Array>): Promise<{ size: number; sha256: string }> {
  const hash = createHash('sha256')
  let size = 0
  for await (const piece of stream) {
    hash.update(piece)
    size += piece.length
  }
  return { size, sha256: hash.digest('hex') }
}
