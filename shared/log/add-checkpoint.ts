import { fromBase64, toBase64 } from '#shared/bytes/base64.ts'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import type { NoteKey } from '#shared/log/signed-note.ts'

/** Requests for a cosignature (C2SP tlog-witness, `add-checkpoint`): what the log and the witness say to each other. */

/** An outside witness of a log: the key that it cosigns with, and where it takes checkpoints. */
export interface WitnessAddress {
  readonly key: NoteKey
  /** Submission prefix. */
  readonly url: string
}

/** A checkpoint on its way to a witness. */
export interface AddCheckpoint {
  /** Size of the checkpoint that the witness cosigned last, as the log knows it; 0: none. */
  readonly oldSize: number
  /** That it is the beginning of the new one (RFC 9162 section 2.1.4); empty for an old size of 0. */
  readonly proof: readonly Uint8Array[]
  /** The signed note of the new checkpoint. */
  readonly note: string
}

/** The type of the answer that tells a witness's own size, with status 409. */
export const SIZE_TYPE = 'text/x.tlog.size'

const MAX_PROOF = 63
/** A note and 63 hashes have far less. */
export const MAX_ADD_CHECKPOINT_BYTES = 2 ** 16

/** The request's body. */
export function addCheckpointBody({ oldSize, proof, note }: AddCheckpoint): string {
  return `old ${oldSize}\n${proof.map((hash) => `${toBase64(hash)}\n`).join('')}\n${note}`
}

/** Reads a request's body strictly; nothing of it is verified. */
export function parseAddCheckpoint(bytes: Uint8Array): Result<AddCheckpoint, Failure<'request-malformed'>> {
  const refuse = (message: string) => fail('request-malformed' as const, '', message)
  const text = bytes.length > MAX_ADD_CHECKPOINT_BYTES ? null : decodeUtf8(bytes)
  if (text === null) return refuse('The request is too long, or no text.')
  const end = text.indexOf('\n\n')
  const [first = '', ...lines] = text.slice(0, Math.max(end, 0)).split('\n')
  const [, size] = /^old (0|[1-9][0-9]{0,15})$/.exec(first) ?? []
  if (end < 0 || size === undefined || !Number.isSafeInteger(Number(size))) {
    return refuse('A request begins with "old", the size last cosigned, and ends its head with an empty line.')
  }
  if (lines.length > MAX_PROOF) return refuse(`A proof has at most ${MAX_PROOF} hashes.`)
  const proof: Uint8Array[] = []
  for (const line of lines) {
    const hash = fromBase64(line)
    if (hash === null || hash.length !== 32) return refuse('A line of the proof is not 32 bytes in base64.')
    proof.push(hash)
  }
  return ok({ oldSize: Number(size), proof, note: text.slice(end + 2) })
}

/** Reads the size in an answer of status 409; null where it is none. */
export function parseWitnessSize(body: string): number | null {
  const [, size] = /^(0|[1-9][0-9]{0,15})\n$/.exec(body) ?? []
  return size !== undefined && Number.isSafeInteger(Number(size)) ? Number(size) : null
}

/** The note with cosignature lines behind its own. */
export const withCosignatures = (note: string, lines: readonly string[]): Uint8Array => utf8(note + lines.join(''))
