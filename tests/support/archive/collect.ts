/** All chunks of a stream as one byte string. */
export async function collect(chunks: AsyncIterable<Uint8Array>): Promise<Uint8Array> {
  const parts: Uint8Array[] = []
  for await (const chunk of chunks) parts.push(chunk)
  return new Uint8Array(Buffer.concat(parts))
}
