import { fromBase64, toBase64 } from '#shared/bytes/base64.ts'
import { toHex } from '#shared/bytes/hex.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import {
  formatNote,
  noteKey,
  parseNote,
  signNoteText,
  verifyNote,
  type NoteCode,
  type NoteKey,
  type SignedNote,
} from '#shared/log/signed-note.ts'

/** Checkpoints of a log (C2SP tlog-checkpoint): a signed note of an origin, a size and a root. */

/** The head of a log at a size. */
export interface Checkpoint {
  /** Names the log: host of the site, a slash, `log`. */
  readonly origin: string
  /** Leaves: 0 to 2^53 − 1. */
  readonly size: number
  /** 32 bytes (RFC 9162 section 2.1.1). */
  readonly root: Uint8Array
}

/** A checkpoint and the note that carries it; witnesses cosign the note's text. */
export interface CheckpointNote {
  readonly checkpoint: Checkpoint
  readonly note: SignedNote
}

export type CheckpointCode = NoteCode | 'checkpoint-malformed' | 'checkpoint-other-log'

/** The origin line of a site's log. `site` is scheme, host and port. */
export function logOrigin(site: string): string {
  return `${site.replace(/^[a-z]+:\/\//, '').replace(/\/+$/, '')}/log`
}

/** The key under which a site signs its log: named like the origin, of type 1. */
export function logKey(sha256: Sha256, origin: string, publicKey: Uint8Array): NoteKey {
  return noteKey(sha256, origin, 1, publicKey)
}

/** The three lines that are signed. */
export function checkpointText({ origin, size, root }: Checkpoint): string {
  return `${origin}\n${size}\n${toBase64(root)}\n`
}

/** Signs a checkpoint with each key; `sign` gives 64 bytes of Ed25519. The same checkpoint and keys give the same note. */
export function signCheckpoint(
  sha256: Sha256,
  checkpoint: Checkpoint,
  ...keys: readonly { readonly publicKey: Uint8Array; sign(message: Uint8Array): Uint8Array }[]
): string {
  const text = checkpointText(checkpoint)
  const signatures = keys.map((key) =>
    signNoteText(text, logKey(sha256, checkpoint.origin, key.publicKey), (message) => key.sign(message)),
  )
  return formatNote({ text, signatures })
}

/**
 * Reads the text of a checkpoint: exactly three lines. Extension lines, which C2SP advises against because no monitor
 * can audit them, are refused.
 */
export function parseCheckpointText(text: string): Result<Checkpoint, Failure<CheckpointCode>> {
  const refuse = (at: string, message: string) => fail('checkpoint-malformed' as const, at, message)
  const [origin, size, root, end, ...rest] = text.split('\n')
  if (origin === undefined || size === undefined || root === undefined || end !== '' || rest.length > 0) {
    return refuse('', 'A checkpoint of this log has three lines: its origin, its size and its root.')
  }
  if (origin === '') return refuse('line 1', 'The origin is empty.')
  if (!/^(?:0|[1-9][0-9]{0,15})$/.test(size) || !Number.isSafeInteger(Number(size))) {
    return refuse('line 2', 'The size is not a whole number without leading zeros, at most 2^53 − 1.')
  }
  const bytes = fromBase64(root)
  if (bytes === null || bytes.length !== 32) return refuse('line 3', 'The root is not 32 bytes in base64.')
  return ok({ origin, size: Number(size), root: bytes })
}

/** Reads a checkpoint; no signature is verified yet. */
export function parseCheckpoint(bytes: Uint8Array): Result<CheckpointNote, Failure<CheckpointCode>> {
  const note = parseNote(bytes)
  if (!note.ok) return note
  const checkpoint = parseCheckpointText(note.value.text)
  return checkpoint.ok ? ok({ checkpoint: checkpoint.value, note: note.value }) : checkpoint
}

/** What is trusted of a log: any of these keys may have signed; where `origin` is given, only that log passes. */
export interface TrustedLog {
  readonly publicKeys: readonly Uint8Array[]
  readonly origin?: string
}

/** Reads a checkpoint and verifies that a trusted key signed it, under the name of its own origin. */
export function openCheckpoint(
  sha256: Sha256,
  bytes: Uint8Array,
  trusted: TrustedLog,
): Result<CheckpointNote, Failure<CheckpointCode>> {
  const parsed = parseCheckpoint(bytes)
  if (!parsed.ok) return parsed
  const { checkpoint, note } = parsed.value
  const { origin } = checkpoint
  if (trusted.origin !== undefined && origin !== trusted.origin) {
    return fail('checkpoint-other-log', 'line 1', `This is a checkpoint of ${origin}, and not of ${trusted.origin}.`)
  }
  if (/[\p{White_Space}+]/u.test(origin)) {
    return fail(
      'checkpoint-malformed',
      'line 1',
      'The origin holds a space or a plus sign, so no key can have its name.',
    )
  }
  const keys = trusted.publicKeys.map((publicKey) => logKey(sha256, origin, publicKey))
  const signed = verifyNote(note, keys)
  return signed.ok ? ok(parsed.value) : signed
}

/** How checkpoints are named to people: size, and the root in hex. */
export function checkpointWords({ size, root }: Checkpoint): string {
  return `${size === 1 ? '1 entry' : `${size} entries`}, root ${toHex(root)}`
}
