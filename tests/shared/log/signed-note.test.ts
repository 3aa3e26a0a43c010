import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { toBase64 } from '#shared/bytes/base64.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import {
  formatNote,
  formatVkey,
  noteKey,
  parseNote,
  parseVkey,
  signNoteText,
  verifyNote,
  type NoteKey,
  type SignedNote,
} from '#shared/log/signed-note.ts'
import { publicKeyOf, signBytes } from '#shared/protocol/signature.ts'

interface Examples {
  verify: { vkey: string; text: string; signature_line: string }
  vkey_good: string
  vkey_bad: string[]
}
// C2SP signed-note.md and Go's sumdb/note tests.
const known = JSON.parse(
  readFileSync(join(import.meta.dirname, '../../outside/c2sp_signed_note.json'), 'utf8'),
) as Examples
const example = `${known.verify.text}\n${known.verify.signature_line}\n`

function key(text: string): NoteKey {
  const parsed = parseVkey(sha256, text)
  if (!parsed.ok) throw new Error(parsed.error.message)
  return parsed.value
}
function note(text: string): SignedNote {
  const parsed = parseNote(utf8(text))
  if (!parsed.ok) throw new Error(parsed.error.message)
  return parsed.value
}

describe('the published examples', () => {
  test('the first note verifies under its key, and its parts write the same bytes', () => {
    const trusted = key(known.verify.vkey)
    expect(formatVkey(trusted)).toBe(known.verify.vkey)
    const read = note(example)
    expect(read.text).toBe(known.verify.text)
    expect(verifyNote(read, [trusted])).toEqual({ ok: true, value: [trusted] })
    expect(formatNote(read)).toBe(example)
  })
  test('the good key is read, the bad ones are not', () => {
    expect(key(known.vkey_good).name).toBe('PeterNeumann')
    const bad = known.vkey_bad.filter((text) => text.includes('+'))
    expect(bad).toHaveLength(2)
    for (const text of bad) expect(parseVkey(sha256, text).ok).toBe(false)
  })
  test('no proper substring of the good key is a key', () => {
    const good = known.vkey_good
    for (let start = 0; start < good.length; start += 1) {
      for (let end = start; end <= good.length; end += 1) {
        if (end - start === good.length) continue
        expect(parseVkey(sha256, good.slice(start, end)).ok, good.slice(start, end)).toBe(false)
      }
    }
  })
  test('no single-byte increment of the good key is a key', () => {
    const good = known.vkey_good
    for (let at = 0; at < good.length; at += 1) {
      const text = good.slice(0, at) + String.fromCharCode(good.charCodeAt(at) + 1) + good.slice(at + 1)
      expect(parseVkey(sha256, text).ok, text).toBe(false)
    }
  })
})

const secret = new Uint8Array(32).fill(3)
const own = noteKey(sha256, 'log.example/a', 1, publicKeyOf(secret))
const sign = (message: Uint8Array): Uint8Array => signBytes(secret, message)

describe('reading notes', () => {
  test.each([
    ['no signature', 'text\n\n'],
    ['no text', '\n— a AAAAAAE=\n'],
    ['no empty line', 'text\n— a AAAAAAE=\n'],
    ['no last line feed', 'text\n\n— a AAAAAAE='],
    ['a hyphen for the dash', 'text\n\n- a AAAAAAE=\n'],
    ['a tab in the text', 'te\txt\n\n— a AAAAAAE=\n'],
    ['a carriage return', 'text\r\n\n— a AAAAAAE=\n'],
    ['a name with a plus', 'text\n\n— a+b AAAAAAE=\n'],
    ['a name with a no-break space', 'text\n\n— a\u00a0b AAAAAAE=\n'],
    ['an empty name', 'text\n\n—  AAAAAAE=\n'],
    ['a third word', 'text\n\n— a AAAAAAE= x\n'],
    ['base64 without padding', 'text\n\n— a AAAAAAE\n'],
    ['a key id and no signature', 'text\n\n— a AAAAAA==\n'],
    ['base64 with loose bits', 'text\n\n— a AAAAAAF=\n'],
  ])('refuses %s', (_, text) => {
    const parsed = parseNote(utf8(text))
    expect(parsed.ok ? 'read' : parsed.error.code).toBe('note-malformed')
  })
  test('refuses bytes that are not UTF-8, and a note beyond its limit', () => {
    expect(parseNote(Uint8Array.of(0xff, 0x0a)).ok).toBe(false)
    expect(parseNote(utf8(`${'x'.repeat(2 ** 18)}${example}`)).ok).toBe(false)
  })
  test('takes a text with empty lines: the last one parts it from the signatures', () => {
    const text = 'one\n\n— not a signature\n\ntwo\n'
    const signed = formatNote({ text, signatures: [signNoteText(text, own, sign)] })
    expect(note(signed).text).toBe(text)
    expect(verifyNote(note(signed), [own]).ok).toBe(true)
  })
  test('takes sixteen signatures, as every verifier must', () => {
    const line = `— b ${toBase64(new Uint8Array(68))}\n`
    expect(note(`text\n\n${line.repeat(16)}`).signatures).toHaveLength(16)
  })
})

describe('whose signatures count', () => {
  const text = 'a text\n'
  const good = signNoteText(text, own, sign)
  const stranger = { ...good, name: 'other.example' }
  const code = (signatures: SignedNote['signatures']): string => {
    const verified = verifyNote({ text, signatures }, [own])
    return verified.ok ? 'verified' : verified.error.code
  }
  test('one of several is enough, and unknown ones are passed over even with a known name or id', () => {
    expect(code([stranger, good])).toBe('verified')
    expect(code([{ ...good, id: '00000000' }, good])).toBe('verified')
    expect(code([stranger])).toBe('note-unsigned')
    expect(code([{ ...good, id: '00000000' }])).toBe('note-unsigned')
  })
  test('a bad signature of a known key refuses the note, also beside a good one', () => {
    const bad = { ...good, signature: good.signature.map((byte, i) => (i === 9 ? byte ^ 1 : byte)) }
    expect(code([bad])).toBe('note-signature')
    expect(code([good, bad])).toBe('note-signature')
    expect(code([{ ...good, signature: good.signature.slice(0, 63) }])).toBe('note-signature')
  })
  test('a key of type 4 signs no text', () => {
    const witness = noteKey(sha256, own.name, 4, own.publicKey)
    expect(witness.id).not.toBe(own.id)
    expect(() => signNoteText(text, witness, sign)).toThrow(RangeError)
    expect(verifyNote({ text, signatures: [{ ...good, id: witness.id }] }, [witness]).ok).toBe(false)
  })
})
