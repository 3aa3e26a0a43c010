import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { checkpointText, logOrigin, openCheckpoint, parseCheckpointText } from '#shared/log/checkpoint.ts'
import { cosign, verifyCosignatures } from '#shared/log/cosignature.ts'
import { formatNote, noteKey, parseNote, type SignedNote } from '#shared/log/signed-note.ts'
import { publicKeyOf, signBytes } from '#shared/protocol/signature.ts'
import { TestLog } from '#tests/support/log/test-log.ts'

// C2SP tlog-checkpoint.md.
const example = (
  JSON.parse(readFileSync(join(import.meta.dirname, '../../outside/c2sp_signed_note.json'), 'utf8')) as {
    checkpoint_example: string
  }
).checkpoint_example

describe('the text of a checkpoint', () => {
  test('the published example reads and writes the same', () => {
    const read = parseCheckpointText(example)
    if (!read.ok) throw new Error(read.error.message)
    expect(read.value.origin).toBe('example.com/behind-the-sofa')
    expect(read.value.size).toBe(20852163)
    expect(checkpointText(read.value)).toBe(example)
  })
  const root = 'CsUYapGGPo4dkMgIAUqom/Xajj7h2fB2MPA3j2jxq2I='
  test.each([
    ['no origin', `\n5\n${root}\n`],
    ['a leading zero', `a\n05\n${root}\n`],
    ['a sign', `a\n+5\n${root}\n`],
    ['a size beyond 2^53 − 1', `a\n9007199254740992\n${root}\n`],
    ['a short root', `a\n5\nAAAA\n`],
    ['an extension line', `a\n5\n${root}\nmore\n`],
    ['a fourth, empty line', `a\n5\n${root}\n\n`],
    ['no last line feed', `a\n5\n${root}`],
    ['two lines', `a\n5\n`],
  ])('refuses %s', (_, text) => {
    expect(parseCheckpointText(text).ok).toBe(false)
  })
  test('the origin of a site is its host, a slash and log', () => {
    expect(logOrigin('https://ravelin-hall.example')).toBe('ravelin-hall.example/log')
    expect(logOrigin('http://127.0.0.1:3000')).toBe('127.0.0.1:3000/log')
  })
})

const log = new TestLog()
log.add('spring-hamper', 'opened')
log.add('spring-hamper', 'closed')
const publicKeys = [publicKeyOf(log.secret)]

describe('a signed checkpoint', () => {
  test('verifies under the key of its log and under no other, name or origin', () => {
    const bytes = utf8(log.note())
    const opened = openCheckpoint(sha256, bytes, { publicKeys, origin: log.origin })
    expect(opened.ok && opened.value.checkpoint).toEqual(log.head())
    const code = (given: Uint8Array, trusted: Parameters<typeof openCheckpoint>[2]): string => {
      const result = openCheckpoint(sha256, given, trusted)
      return result.ok ? 'opened' : result.error.code
    }
    expect(code(bytes, { publicKeys: [publicKeyOf(new Uint8Array(32).fill(8))] })).toBe('note-unsigned')
    expect(code(bytes, { publicKeys, origin: 'elsewhere.example/log' })).toBe('checkpoint-other-log')
    expect(code(utf8(log.note().replace('\n2\n', '\n3\n')), { publicKeys })).toBe('note-signature')
    const renamed = new TestLog(log.secret, 'elsewhere.example/log')
    renamed.leaves.push(...log.leaves)
    const mixed = log.note().replace(log.origin, renamed.origin)
    expect(code(utf8(mixed), { publicKeys })).toBe('note-unsigned')
  })
})

describe('cosignatures', () => {
  const secret = new Uint8Array(32).fill(21)
  const witness = noteKey(sha256, 'witness.example/one', 4, publicKeyOf(secret))
  const parse = (text: string): SignedNote => {
    const parsed = parseNote(utf8(text))
    if (!parsed.ok) throw new Error(parsed.error.message)
    return parsed.value
  }
  const note = parse(log.note())
  const line = cosign(note.text, 1772000000, witness, (message) => signBytes(secret, message))
  const cosigned = parse(formatNote({ text: note.text, signatures: [...note.signatures, line] }))

  test('is found with its time, and leaves the log’s own signature good', () => {
    expect(verifyCosignatures(cosigned, [witness])).toEqual({ ok: true, value: [{ witness, time: 1772000000 }] })
    expect(openCheckpoint(sha256, utf8(formatNote(cosigned)), { publicKeys }).ok).toBe(true)
  })
  test('the message is the one of the specification', () => {
    // The bytes that C2SP tlog-cosignature.md shows for its example.
    const seen: Uint8Array[] = []
    cosign(example, 1679315147, witness, (message) => {
      seen.push(message)
      return new Uint8Array(64)
    })
    expect(seen[0]).toEqual(utf8(`cosignature/v1\ntime 1679315147\n${example}`))
  })
  test('another time, another text, or another length under a known name refuses the note', () => {
    const late = { ...line, signature: line.signature.map((byte, i) => (i === 7 ? byte ^ 1 : byte)) }
    expect(verifyCosignatures({ ...cosigned, signatures: [late] }, [witness]).ok).toBe(false)
    expect(verifyCosignatures({ text: log.note(1), signatures: [line] }, [witness]).ok).toBe(false)
    expect(
      verifyCosignatures({ ...cosigned, signatures: [{ ...line, signature: line.signature.slice(8) }] }, [witness]).ok,
    ).toBe(false)
  })
  test('an unknown witness is passed over', () => {
    const other = noteKey(sha256, 'witness.example/two', 4, publicKeyOf(secret))
    expect(verifyCosignatures(cosigned, [other])).toEqual({ ok: true, value: [] })
    expect(verifyCosignatures(note, [witness])).toEqual({ ok: true, value: [] })
  })
})
