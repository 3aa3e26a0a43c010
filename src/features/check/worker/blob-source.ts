import type { ByteSource } from '#shared/archive/byte-source.ts'

/** Bytes taken from a file at once: each call to the browser costs the same, whatever its length. */
const AHEAD = 2 ** 20

/** A file or Blob as a byte source. It stays where it is; a mebibyte of it is held at a time. Rejects as the browser does. */
export function blobSource(blob: Blob): ByteSource {
  let start = 0
  let held = new Uint8Array(0)
  const take = async (from: number, to: number) => new Uint8Array(await blob.slice(from, to).arrayBuffer())
  return {
    size: blob.size,
    async read(offset, length) {
      if (offset < 0 || length < 0 || offset + length > blob.size) {
        throw new RangeError('The read lies outside the file.')
      }
      if (length > AHEAD) return take(offset, offset + length)
      if (offset < start || offset + length > start + held.length) {
        const taken = await take(offset, Math.min(blob.size, offset + AHEAD))
        if (taken.length < length) throw new Error('The file became shorter while it was being read.')
        start = offset
        held = taken
      }
      return held.subarray(offset - start, offset - start + length)
    },
  }
}
