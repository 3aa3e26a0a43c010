import { concatBytes, u64, utf8 } from '#shared/bytes/bytes.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import type { NoteCode, NoteKey, NoteSignature, SignedNote } from '#shared/log/signed-note.ts'
import { verifySignature } from '#shared/protocol/signature.ts'

/**
 * Cosignatures of witnesses (C2SP tlog-cosignature, Ed25519, type 4): somebody other than the site says that, as of a
 * time, this is the largest head of the log that they have seen, and that it only grew.
 */

/** A cosignature that verified. `time` in seconds since 1970. */
export interface Cosignature {
  readonly witness: NoteKey
  readonly time: number
}

/** What a witness signs: a header, the time, and the checkpoint's text. */
export function cosignatureMessage(text: string, time: number): Uint8Array {
  if (!Number.isSafeInteger(time) || time < 0) throw new RangeError('a cosignature has a time in whole seconds')
  return utf8(`cosignature/v1\ntime ${time}\n${text}`)
}

/** Cosigns the text of a checkpoint. `sign` gives 64 bytes of Ed25519. */
export function cosign(
  text: string,
  time: number,
  witness: NoteKey,
  sign: (message: Uint8Array) => Uint8Array,
): NoteSignature {
  if (witness.type !== 4) throw new RangeError('a cosignature needs a key of type 4')
  const signature = concatBytes(u64(time), sign(cosignatureMessage(text, time)))
  return { name: witness.name, id: witness.id, signature }
}

/** The time that a cosignature states and its 64 bytes; null where it has another form. Nothing is verified. */
export function readCosignature(
  signature: Uint8Array,
): { readonly time: number; readonly signature: Uint8Array } | null {
  if (signature.length !== 72) return null
  let time = 0
  for (let i = 0; i < 8; i += 1) time = time * 256 + (signature[i] as number)
  return Number.isSafeInteger(time) ? { time, signature: signature.slice(8) } : null
}

/**
 * The cosignatures of trusted witnesses in a note. Others are passed over; one that claims to be of a trusted witness
 * and is not, refuses the whole note. None at all is no failure: the list is then empty.
 */
export function verifyCosignatures(
  note: SignedNote,
  witnesses: readonly NoteKey[],
): Result<readonly Cosignature[], Failure<NoteCode>> {
  const found: Cosignature[] = []
  for (const [index, line] of note.signatures.entries()) {
    const witness = witnesses.find(({ type, name, id }) => type === 4 && name === line.name && id === line.id)
    if (!witness) continue
    const stated = readCosignature(line.signature)
    if (
      stated === null ||
      !verifySignature(witness.publicKey, cosignatureMessage(note.text, stated.time), stated.signature)
    ) {
      return fail('note-signature', `signature ${index + 1}`, `The cosignature of ${line.name} is not good.`)
    }
    found.push({ witness, time: stated.time })
  }
  return ok(found)
}
