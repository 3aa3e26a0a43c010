import { fromBase64, toBase64 } from '#shared/bytes/base64.ts'
import { concatBytes, decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { isHex, toHex } from '#shared/bytes/hex.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import { isSoundPublicKey, verifySignature } from '#shared/protocol/signature.ts'

/** Signed notes (C2SP signed-note, v1): a text, an empty line, and one line for each signature. */

/** What a key of a note is for: 1 signs the text (Ed25519), 4 cosigns a checkpoint with a time (tlog-cosignature). */
export type NoteKeyType = 1 | 4

/** A key that somebody trusts: its name and its key id tell it from others, its 32 bytes verify. */
export interface NoteKey {
  readonly name: string
  readonly type: NoteKeyType
  /** Raw Ed25519, 32 bytes. */
  readonly publicKey: Uint8Array
  /** First four bytes of SHA-256(name || 0x0A || type || key), as 8 hex digits. */
  readonly id: string
}

/** One signature line, not yet verified. */
export interface NoteSignature {
  readonly name: string
  readonly id: string
  /** What stands behind the key id: 64 bytes for type 1, 72 for type 4. */
  readonly signature: Uint8Array
}

export interface SignedNote {
  /** With its last line feed; nothing is signed but this. */
  readonly text: string
  readonly signatures: readonly NoteSignature[]
}

/** Why bytes are no signed note, or why its signatures do not vouch for it. */
export type NoteCode = 'note-malformed' | 'note-unsigned' | 'note-signature' | 'note-key-malformed'

/** Room for a text and for far more than the 16 signatures that a verifier must accept. */
export const MAX_NOTE_BYTES = 2 ** 18
const MAX_SIGNATURES = 100
const DASH = '\u2014 '

/** A key with its id. Throws a RangeError for a name that a note cannot hold, or a key that is not 32 bytes. */
export function noteKey(sha256: Sha256, name: string, type: NoteKeyType, publicKey: Uint8Array): NoteKey {
  if (!isKeyName(name)) throw new RangeError('a key name is not empty and has no space and no plus sign')
  if (publicKey.length !== 32) throw new RangeError('an Ed25519 public key has 32 bytes')
  const hash = sha256(concatBytes(utf8(`${name}\n`), Uint8Array.of(type), publicKey))
  return { name, type, publicKey, id: toHex(hash.subarray(0, 4)) }
}

/** The form in which people hand keys on: `name+id+base64(type || key)`. */
export function formatVkey(key: NoteKey): string {
  return `${key.name}+${key.id}+${toBase64(concatBytes(Uint8Array.of(key.type), key.publicKey))}`
}

/** Reads a `name+id+base64` key; the id must be that of the name and the key. */
export function parseVkey(sha256: Sha256, text: string): Result<NoteKey, Failure<NoteCode>> {
  const refuse = (message: string) => fail('note-key-malformed' as const, '', message)
  const [, name, id, encoded] = /^([^+]+)\+([^+]+)\+(.+)$/su.exec(text) ?? []
  if (name === undefined || id === undefined || encoded === undefined || !isKeyName(name) || !isHex(id, 4)) {
    return refuse('A key is written NAME+ID+KEY: a name without spaces, 8 hexadecimal digits, base64.')
  }
  const bytes = fromBase64(encoded)
  const type = bytes?.[0]
  if (bytes === null || bytes.length !== 33 || (type !== 1 && type !== 4)) {
    return refuse('This is not an Ed25519 key of type 1 or 4.')
  }
  const key = noteKey(sha256, name, type, bytes.slice(1))
  if (key.id !== id) return refuse(`The id of this name and key is ${key.id}, and not ${id}.`)
  if (!isSoundPublicKey(key.publicKey)) return refuse('This key is not canonical, or of small order.')
  return ok(key)
}

/** Whether a note can carry a text: lines that end with a line feed, and no other control character. */
export function isNoteText(text: string): boolean {
  return text.endsWith('\n') && !/[\u0000-\u0009\u000b-\u001f\ud800-\udfff]/.test(text.replace(PAIRS, ''))
}
const PAIRS = /[\ud800-\udbff][\udc00-\udfff]/g

/** Signs a text with a key of type 1. `sign` gives 64 bytes. Throws a RangeError for a text that is none. */
export function signNoteText(text: string, key: NoteKey, sign: (message: Uint8Array) => Uint8Array): NoteSignature {
  if (key.type !== 1) throw new RangeError('a key of type 4 cosigns checkpoints only')
  if (!isNoteText(text)) throw new RangeError('the text of a note ends with a line feed')
  return { name: key.name, id: key.id, signature: sign(utf8(text)) }
}

/** The note as text. */
export function formatNote(note: SignedNote): string {
  return `${note.text}\n${note.signatures.map(formatSignatureLine).join('')}`
}

/** One signature line with its line feed. */
export function formatSignatureLine({ name, id, signature }: NoteSignature): string {
  const bytes = Uint8Array.from([0, 2, 4, 6], (at) => Number.parseInt(id.slice(at, at + 2), 16))
  return `${DASH}${name} ${toBase64(concatBytes(bytes, signature))}\n`
}

/** Reads a signed note strictly; nothing is verified yet. */
export function parseNote(bytes: Uint8Array): Result<SignedNote, Failure<NoteCode>> {
  const refuse = (at: string, message: string) => fail('note-malformed' as const, at, message)
  if (bytes.length > MAX_NOTE_BYTES) return refuse('', `A signed note has at most ${MAX_NOTE_BYTES} bytes.`)
  const whole = decodeUtf8(bytes)
  if (whole === null) return refuse('', 'A signed note is UTF-8 text.')
  if (!isNoteText(whole)) return refuse('', 'A signed note is lines of text, and its last one ends too.')
  const split = whole.lastIndexOf('\n\n')
  const text = whole.slice(0, split + 1)
  const lines = whole
    .slice(split + 2)
    .split('\n')
    .slice(0, -1)
  if (split < 1 || lines.length === 0) return refuse('', 'A signed note has a text, an empty line and signatures.')
  if (lines.length > MAX_SIGNATURES) return refuse('', `A signed note has at most ${MAX_SIGNATURES} signatures.`)
  const signatures: NoteSignature[] = []
  for (const [index, line] of lines.entries()) {
    const signature = parseSignatureLine(line)
    if (signature === null) return refuse(`signature ${index + 1}`, 'This line is not a dash, a name and base64.')
    signatures.push(signature)
  }
  return ok({ text, signatures })
}

/** One signature line without its line feed; null where it is none. */
export function parseSignatureLine(line: string): NoteSignature | null {
  if (!line.startsWith(DASH)) return null
  const [name, encoded, ...rest] = line.slice(DASH.length).split(' ')
  if (name === undefined || encoded === undefined || rest.length > 0 || !isKeyName(name)) return null
  const bytes = fromBase64(encoded)
  if (bytes === null || bytes.length < 5) return null
  return { name, id: toHex(bytes.subarray(0, 4)), signature: bytes.slice(4) }
}

/**
 * Whether trusted keys of type 1 vouch for a note. Signatures of other keys are passed over, even if they share a name
 * or an id; one that claims to be of a trusted key and is not, refuses the whole note; and so does having none.
 * Returns the keys that signed.
 */
export function verifyNote(
  note: SignedNote,
  trusted: readonly NoteKey[],
): Result<readonly NoteKey[], Failure<NoteCode>> {
  const signers = new Set<NoteKey>()
  const message = utf8(note.text)
  for (const [index, { name, id, signature }] of note.signatures.entries()) {
    const key = trusted.find((known) => known.type === 1 && known.name === name && known.id === id)
    if (!key) continue
    if (!verifySignature(key.publicKey, message, signature)) {
      return fail('note-signature', `signature ${index + 1}`, `The signature of ${name} is not good.`)
    }
    signers.add(key)
  }
  if (signers.size > 0) return ok([...signers])
  const names = trusted.map(({ name, id }) => `${name} (key ${id})`).join(' or ')
  return fail('note-unsigned', '', `No signature here is of ${names}.`)
}

function isKeyName(name: string): boolean {
  return name !== '' && isNoteText(`${name}\n`) && !/[\p{White_Space}+]/u.test(name)
}
