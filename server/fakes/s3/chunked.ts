import { createHash } from 'node:crypto'
import { type Authenticated, sameText } from './authenticate.ts'
import { S3Error } from './s3-error.ts'
import { chunkSignature, emptySha256, trailerSignature } from './sigv4.ts'

/**
 * The content coding aws-chunked (Amazon S3 API reference, "Transferring payload in multiple chunks"): hexadecimal
 * size, for the signed schemes a signature, the data, and after the empty chunk the trailing headers.
 */
export interface ChunkedOptions {
  /** Each chunk and the trailer carry a signature chained from the request's own. */
  readonly signedBy: Authenticated | undefined
  /** The scheme's name ends in -TRAILER. */
  readonly trailer: boolean
}

/** Only the last chunk with data may be smaller. */
const smallestChunk = 8192

export const incompleteBody = () =>
  new S3Error(
    'IncompleteBody',
    400,
    'You did not provide the number of bytes specified by the Content-Length HTTP header',
  )

const badChunk = (message: string) => new S3Error('InvalidChunk', 400, message)

const badSignature = (what: string) =>
  new S3Error('SignatureDoesNotMatch', 403, `The signature of ${what} does not match the one we calculated.`)

/** Yields the data without its framing; afterwards the trailing headers, lower case, stand in `trailers`. */
export async function* decodeAwsChunked(
  source: AsyncIterable<Uint8Array>,
  options: ChunkedOptions,
  trailers: Map<string, string>,
): AsyncGenerator<Uint8Array> {
  const input = new ByteReader(source)
  const { signedBy } = options
  let previous = signedBy?.signature ?? ''
  let lastSize = Number.POSITIVE_INFINITY
  for (;;) {
    const head = /^([0-9a-fA-F]{1,8})(?:;chunk-signature=([0-9a-f]{64}))?$/.exec(await input.line())
    if (!head) throw badChunk('A chunk must begin with its size in hexadecimal digits.')
    const size = Number.parseInt(head[1] ?? '', 16)
    if (size > 0 && lastSize < smallestChunk)
      throw new S3Error(
        'InvalidChunkSizeError',
        403,
        'Only the last chunk is allowed to have a size less than 8192 bytes',
      )
    lastSize = size
    const hash = createHash('sha256')
    for await (const piece of input.bytes(size)) {
      hash.update(piece)
      yield piece
    }
    if (signedBy) {
      const computed = chunkSignature(
        signedBy.key,
        signedBy.amzDate,
        signedBy.scope,
        previous,
        size === 0 ? emptySha256 : hash.digest('hex'),
      )
      if (!sameText(computed, head[2] ?? '')) throw badSignature('a chunk')
      previous = computed
    }
    if (size === 0) break
    if ((await input.line()) !== '') throw badChunk('A chunk must end with a line end where its size says so.')
  }
  if (options.trailer) await readTrailer(input, signedBy, previous, trailers)
  else if ((await input.line()) !== '') throw badChunk('This scheme has no trailing headers.')
  if (!(await input.atEnd())) throw badChunk('There are bytes behind the last chunk.')
}

async function readTrailer(
  input: ByteReader,
  signedBy: Authenticated | undefined,
  previous: string,
  trailers: Map<string, string>,
): Promise<void> {
  let signed = ''
  let signature: string | undefined
  for (let line = await input.line(); line !== ''; line = await input.line()) {
    const colon = line.indexOf(':')
    if (colon < 1) throw badChunk('A trailing header needs a name, a colon and a value.')
    const name = line.slice(0, colon).trim().toLowerCase()
    const value = line.slice(colon + 1).trim()
    if (name === 'x-amz-trailer-signature') signature = value
    else {
      signed += `${name}:${value}\n`
      trailers.set(name, value)
    }
    if (trailers.size > 16) throw badChunk('There are too many trailing headers.')
  }
  if (!signedBy) return
  const computed = trailerSignature(signedBy.key, signedBy.amzDate, signedBy.scope, previous, signed)
  if (!signature || !sameText(computed, signature)) throw badSignature('the trailing headers')
}

/** Reads lines and counted bytes from a stream, holding one piece of it at a time. */
class ByteReader {
  private readonly iterator: AsyncIterator<Uint8Array>
  private held: Buffer = Buffer.alloc(0)

  constructor(source: AsyncIterable<Uint8Array>) {
    this.iterator = source[Symbol.asyncIterator]()
  }

  private async more(): Promise<boolean> {
    const next = await this.iterator.next()
    if (next.done) return false
    this.held = this.held.length === 0 ? Buffer.from(next.value) : Buffer.concat([this.held, next.value])
    return true
  }

  /** The next line without its CR LF. */
  async line(): Promise<string> {
    let end = this.held.indexOf('\r\n')
    while (end < 0) {
      if (this.held.length > 8192) throw badChunk('A line of the framing is too long.')
      if (!(await this.more())) throw incompleteBody()
      end = this.held.indexOf('\r\n')
    }
    const line = this.held.subarray(0, end).toString('latin1')
    this.held = this.held.subarray(end + 2)
    // The documentation's own example ends a trailing header with an extra line feed.
    return line.replace(/\n$/, '')
  }

  async *bytes(count: number): AsyncGenerator<Uint8Array> {
    let left = count
    while (left > 0) {
      if (this.held.length === 0 && !(await this.more())) throw incompleteBody()
      const piece = this.held.subarray(0, left)
      this.held = this.held.subarray(piece.length)
      left -= piece.length
      if (piece.length > 0) yield piece
    }
  }

  async atEnd(): Promise<boolean> {
    while (this.held.length === 0) if (!(await this.more())) return true
    return false
  }
}
