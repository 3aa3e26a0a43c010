/** Bytes that can be read at any place: a file, a Blob, or memory. */
export interface ByteSource {
  /** Length in bytes. */
  readonly size: number
  /** The bytes from `offset`, exactly `length` of them. Requires 0 <= offset and offset + length <= size. */
  read(offset: number, length: number): Promise<Uint8Array>
}

/** A byte source over bytes in memory; reads are views, not copies. */
export function memorySource(bytes: Uint8Array): ByteSource {
  return {
    size: bytes.length,
    read: (offset, length) => {
      if (offset < 0 || length < 0 || offset + length > bytes.length) {
        return Promise.reject(new RangeError('The read lies outside the bytes.'))
      }
      return Promise.resolve(bytes.subarray(offset, offset + length))
    },
  }
}

/** Turns a stream of chunks into another one, as deflate and inflate do. */
export type ByteTransform = (chunks: AsyncIterable<Uint8Array>) => AsyncIterable<Uint8Array>
