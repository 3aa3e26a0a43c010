import { open } from 'node:fs/promises'
import type { ByteSource } from '#shared/archive/byte-source.ts'

/** A file as a byte source. Close it when done. Rejects with Node's own error where the file cannot be opened. */
export async function openFileSource(path: string): Promise<ByteSource & { close(): Promise<void> }> {
  const file = await open(path, 'r')
  const { size } = await file.stat()
  return {
    size,
    async read(offset, length) {
      const bytes = new Uint8Array(length)
      let done = 0
      while (done < length) {
        const { bytesRead } = await file.read(bytes, done, length - done, offset + done)
        if (bytesRead === 0) throw new Error('The file became shorter while it was being read.')
        done += bytesRead
      }
      return bytes
    },
    close: () => file.close(),
  }
}
