import { constants, crc32, deflateRawSync } from 'node:zlib'

const GZIP_HEADER = Buffer.from([0x1f, 0x8b, 8, 0, 0, 0, 0, 0, 0, 0xff])
/** A last, empty stored block (RFC 1951, 3.2.4). */
const LAST_BLOCK = Buffer.from([1, 0, 0, 0xff, 0xff])

/**
 * A rendered page that can be sent again and again, each time with a nonce of its own: the places of the nonce are known,
 * and what lies between them is compressed once.
 */
export class KeptPage {
  readonly status: number
  /** Bytes that this page keeps in memory, about. */
  readonly weight: number
  /** Names and values in turns, as writeHead takes them; of some values, what lies around the nonce. */
  readonly #headers: readonly string[]
  readonly #headersWithNonce: readonly (readonly [index: number, parts: readonly string[]])[]
  readonly #nonce: string
  readonly #body: Buffer
  readonly #places: readonly number[]
  #packed: readonly Buffer[] | null = null

  /** `nonce` is the one that the body and the headers were made with; others put in its place must be as long. */
  constructor(status: number, headers: readonly (readonly [string, string])[], body: Buffer, nonce: string) {
    this.status = status
    this.#headers = headers.flat()
    this.#headersWithNonce = this.#headers.flatMap((text, index) =>
      text.includes(nonce) ? [[index, text.split(nonce)] as const] : [],
    )
    this.#nonce = nonce
    this.#body = body
    const places: number[] = []
    for (let at = body.indexOf(nonce); at >= 0; at = body.indexOf(nonce, at + nonce.length)) places.push(at)
    this.#places = places
    this.weight = body.length * 1.5 + 2000
  }

  /** Names and values in turns; the array is the caller's. */
  headers(nonce: string): string[] {
    const headers = [...this.#headers]
    for (const [index, parts] of this.#headersWithNonce) headers[index] = parts.join(nonce)
    return headers
  }

  plain(nonce: string): Buffer {
    const body = Buffer.allocUnsafe(this.#body.length)
    this.#body.copy(body)
    for (const place of this.#places) body.write(nonce, place, 'latin1')
    return body
  }

  /** One gzip member (RFC 1952): kept compressed pieces, and each nonce in a stored block between them. */
  gzip(nonce: string): Buffer {
    const pieces = (this.#packed ??= this.#pack())
    const plain = this.plain(nonce)
    const stored = storedBlock(Buffer.from(nonce, 'latin1'))
    const parts: Buffer[] = [GZIP_HEADER]
    pieces.forEach((piece, index) => {
      if (index > 0) parts.push(stored)
      parts.push(piece)
    })
    const trailer = Buffer.alloc(8)
    trailer.writeUInt32LE(crc32(plain), 0)
    trailer.writeUInt32LE(plain.length, 4)
    parts.push(LAST_BLOCK, trailer)
    return Buffer.concat(parts)
  }

  #pack(): Buffer[] {
    const ends = [...this.#places, this.#body.length]
    return ends.map((end, index) => {
      const previous = this.#places[index - 1]
      const start = previous === undefined ? 0 : previous + this.#nonce.length
      // A full flush ends on a whole byte, and nothing after it refers back.
      return deflateRawSync(this.#body.subarray(start, end), { level: 6, finishFlush: constants.Z_FULL_FLUSH })
    })
  }
}

function storedBlock(bytes: Buffer): Buffer {
  const head = Buffer.alloc(5)
  head.writeUInt16LE(bytes.length, 1)
  head.writeUInt16LE(~bytes.length & 0xffff, 3)
  return Buffer.concat([head, bytes])
}
