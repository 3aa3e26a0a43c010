import { ArchiveError } from '#shared/archive/archive-error.ts'
import { checkMemberName } from '#shared/archive/zip-format.ts'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { isHex, toHex } from '#shared/bytes/hex.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'

/** SHA-256 over bytes that come in pieces. `digest` is called once, at the end. */
export interface StreamingHash {
  update(bytes: Uint8Array): void
  digest(): Uint8Array
}

export const SUMS_MEMBER = 'SHA256SUMS'

export type SumsCode = 'sums-malformed' | 'sums-doubled'

/** The digest of a whole stream, in lower-case hex. */
export async function digestOf(chunks: AsyncIterable<Uint8Array>, hash: StreamingHash): Promise<string> {
  for await (const chunk of chunks) hash.update(chunk)
  return toHex(hash.digest())
}

/** `SHA256SUMS` for members and their digests in hex, in the order given; `sha256sum -c` reads it. */
export function sumsBytes(digests: Iterable<readonly [name: string, digest: string]>): Uint8Array {
  let lines = ''
  for (const [name, digest] of digests) {
    checkMemberName(name)
    if (!isHex(digest, 32)) throw new TypeError(`the digest of ${name} is not 64 hex digits`)
    lines += `${digest}  ${name}\n`
  }
  return utf8(lines)
}

/** Reads `SHA256SUMS` strictly: 64 hex digits, two spaces, a member's name; no name twice in any letter case. */
export function parseSums(bytes: Uint8Array): Result<ReadonlyMap<string, string>, Failure<SumsCode>> {
  const text = decodeUtf8(bytes)
  const malformed = (at: string) =>
    fail(
      'sums-malformed',
      at,
      'A line must be 64 hexadecimal digits, two spaces, the name of a member and a line feed.',
    )
  if (text === null || (text !== '' && !text.endsWith('\n'))) return malformed('')
  const sums = new Map<string, string>()
  const seen = new Set([SUMS_MEMBER.toLowerCase()])
  for (const [index, line] of text.split('\n').slice(0, -1).entries()) {
    const at = `line ${index + 1}`
    const match = /^([0-9a-f]{64}) {2}(.+)$/.exec(line)
    if (match === null) return malformed(at)
    const [, digest = '', name = ''] = match
    if (!isMemberName(name)) return malformed(at)
    if (seen.has(name.toLowerCase())) return fail('sums-doubled', at, `${name} stands here for the second time.`)
    seen.add(name.toLowerCase())
    sums.set(name, digest)
  }
  return ok(sums)
}

function isMemberName(name: string): boolean {
  try {
    checkMemberName(name)
    return true
  } catch (error) {
    if (error instanceof ArchiveError) return false
    throw error
  }
}
