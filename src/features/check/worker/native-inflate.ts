import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { ByteTransform } from '#shared/archive/byte-source.ts'
import { inflateInJavaScript } from '#shared/archive/codec.ts'

/** Given to the browser at once: deflate blows a byte up to 1,032, and what comes out of one piece waits in memory. */
const PIECE = 16_384

/**
 * Raw inflate by the browser (Compression Streams, WHATWG): it refuses damaged bytes, an early end and bytes behind the
 * last block, as inflateInJavaScript does, which stands in where a browser lacks it.
 */
export const inflateInBrowser: ByteTransform = (chunks) => {
  const stream = newStream()
  return stream ? inflateThrough(stream, chunks) : inflateInJavaScript(chunks)
}

function newStream(): DecompressionStream | null {
  try {
    return new DecompressionStream('deflate-raw')
  } catch {
    return null
  }
}

async function* inflateThrough(
  stream: DecompressionStream,
  chunks: AsyncIterable<Uint8Array>,
): AsyncGenerator<Uint8Array, void, undefined> {
  const writer = stream.writable.getWriter()
  const reader = stream.readable.getReader()
  // What went wrong while the packed bytes were read, which is no fault of theirs.
  let source: { readonly error: unknown } | null = null
  const feed = async () => {
    try {
      for await (const chunk of chunks) {
        for (let at = 0; at < chunk.length; at += PIECE) {
          const piece = chunk.subarray(at, at + PIECE) as Uint8Array<ArrayBuffer>
          if (!(await settles(writer.write(piece)))) return
        }
      }
      await settles(writer.close())
    } catch (error) {
      source = { error }
      await settles(writer.abort(error))
    }
  }
  const feeding = feed()
  try {
    for (;;) {
      const { done, value } = await readOrRefuse(reader, () => source)
      if (done) break
      yield value
    }
  } finally {
    await settles(reader.cancel())
    await feeding
  }
}

async function readOrRefuse(
  reader: ReadableStreamDefaultReader<Uint8Array>,
  source: () => { readonly error: unknown } | null,
) {
  try {
    return await reader.read()
  } catch {
    const fault = source()
    if (fault) throw fault.error
    const message = 'The compressed bytes are damaged, end too early or go on behind their end.'
    throw new ArchiveError('member-compression', null, message)
  }
}

const settles = (promise: Promise<unknown>) =>
  promise.then(
    () => true,
    () => false,
  )
