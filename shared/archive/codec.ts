import { Deflate, Inflate } from 'fflate'
import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { ByteTransform } from '#shared/archive/byte-source.ts'

/** Raw deflate (RFC 1951) in plain JavaScript, for wherever no native one is at hand. */
export const deflateInJavaScript: ByteTransform = async function* (chunks) {
  const out: Uint8Array[] = []
  const deflate = new Deflate({ level: 6 }, (chunk) => out.push(chunk))
  for await (const chunk of chunks) {
    deflate.push(chunk)
    yield* out.splice(0)
  }
  deflate.push(new Uint8Array(0), true)
  yield* out.splice(0)
}

/**
 * Raw inflate (RFC 1951) in plain JavaScript. Throws an ArchiveError, with no member named, on a broken stream, one that
 * ends too early, and one with bytes behind its last block.
 */
export const inflateInJavaScript: ByteTransform = async function* (chunks) {
  const out: Uint8Array[] = []
  const inflate = new Inflate((chunk) => out.push(chunk))
  const push = (chunk: Uint8Array) => {
    try {
      inflate.push(chunk)
    } catch {
      throw new ArchiveError('member-compression', null, 'The compressed bytes are damaged.')
    }
  }
  for await (const chunk of chunks) {
    // Small pieces bound what one step can blow up to: deflate yields at most 1,032 bytes for one.
    for (let at = 0; at < chunk.length; at += 16_384) {
      push(chunk.subarray(at, at + 16_384))
      yield* out.splice(0)
    }
  }
  const { ended, bytesBehind } = endOf(inflate)
  if (!ended) throw new ArchiveError('member-compression', null, 'The compressed bytes end too early.')
  if (bytesBehind > 0) {
    throw new ArchiveError('member-compression', null, 'There are bytes behind the end of the compressed data.')
  }
}

/**
 * Whether fflate has read a last block to its end, and how many whole bytes it was given behind it. It has no public name
 * for either; its own gunzip reads the same fields: `p` is what is left of the input, `s.p` the bit at which it stopped
 * in there, `s.f` whether a last block was begun, `s.l` the codes of a block that is not at its end.
 */
function endOf(inflate: Inflate): { ended: boolean; bytesBehind: number } {
  const { p: left, s: state } = inflate as unknown as { p: unknown; s: { p?: unknown; f?: unknown; l?: unknown } }
  if (!(left instanceof Uint8Array) || typeof state !== 'object') {
    throw new Error('This version of fflate keeps its state elsewhere: adapt endOf.')
  }
  const midByte = typeof state.p === 'number' && state.p > 0
  return { ended: state.f === 1 && !state.l, bytesBehind: left.length - (midByte ? 1 : 0) }
}
