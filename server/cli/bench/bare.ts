import { hash } from 'node:crypto'
import { Readable } from 'node:stream'
import { parse } from 'csv-parse'

// The least that the work can cost: the SHA-256 calls that the format itself asks for, by crypto.hash on one core, with
// nothing around them, and the bare parse of the file.

/** SHA-256 calls over messages of one length. */
export interface HashCalls {
  readonly count: number
  readonly length: number
}

/** Makes the calls and nothing else. */
export function bareHashes(calls: readonly HashCalls[]): void {
  for (const { count, length } of calls) {
    const message = new Uint8Array(length)
    for (let i = 0; i < count; i++) {
      message[i % length] = i & 0xff
      hash('sha256', message, 'buffer')
    }
  }
}

const HMAC_BLOCK = 64
const DIGEST = 32

/** HMAC (RFC 2104) of messages of one length under a key of at most 64 bytes: an inner and an outer hash each. */
function hmacCalls(count: number, length: number): HashCalls[] {
  return [
    { count, length: HMAC_BLOCK + length },
    { count, length: HMAC_BLOCK + DIGEST },
  ]
}

/** The tree over n leaves (PROTOCOL section 2): n leaf hashes of 41 bytes, n - 1 node hashes of 81. */
export function treeCalls(n: number): HashCalls[] {
  return [
    { count: n, length: 41 },
    { count: n - 1, length: 81 },
  ]
}

/** Commitments of n entrants (section 1), for labels and identities of some mean lengths in bytes. */
export function commitmentCalls(n: number, reference: number, label: number, identity: number): HashCalls[] {
  return [
    ...hmacCalls(n, reference),
    ...hmacCalls(n, 'label'.length),
    ...hmacCalls(n, 'identity'.length),
    { count: n, length: 1 + DIGEST + label },
    { count: n, length: 1 + DIGEST + identity },
    { count: n, length: 1 + DIGEST + DIGEST },
  ]
}

/** Parses a CSV file into rows and drops them. */
export async function bareCsvParse(csv: Uint8Array): Promise<number> {
  let rows = 0
  const parser = parse()
  Readable.from(pieces(csv)).pipe(parser)
  for await (const _row of parser) rows++
  return rows
}

/** Bytes in the pieces in which a file would come. */
export function* pieces(bytes: Uint8Array): Generator<Buffer> {
  for (let at = 0; at < bytes.length; at += 65_536)
    yield Buffer.from(bytes.buffer, bytes.byteOffset + at, Math.min(65_536, bytes.length - at))
}
