import { canonicalBytes, parseCanonicalJson, type CanonicalJsonCode } from '../bytes/canonical-json.ts'
import { concatBytes, utf8 } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import type { Failure, Result } from '../bytes/result.ts'
import { FORMAT } from './limits.ts'
import { hex, members, nullable, oneOf, readShape, text, time, type ShapeCode } from './shape.ts'

/** What can happen to a draw, in the site's log (PROTOCOL section 13). */
export const LOG_EVENTS = [
  'opened',
  'closed',
  'sealed',
  'replaced',
  'postponed',
  'cancelled',
  'tosses-done',
  'drawn',
  'failed',
  'revealed',
  'promoted',
  'forfeited',
  'substituted',
  'withheld',
  'suspended',
  'restored',
  'checkpointed',
] as const
export type LogEvent = (typeof LOG_EVENTS)[number]

/** A leaf of the site's log. Digests in hex; draw and organisation are slugs. */
export interface LogLeaf {
  readonly at: string
  readonly digest: string | null
  readonly draw: string | null
  readonly event: LogEvent
  readonly format: 'evenpenny/1'
  readonly kind: 'log'
  readonly note: string | null
  readonly organisation: string
  readonly supersedes: string | null
}

/** A leaf's data: JCS. */
export function logLeafBytes(leaf: LogLeaf): Uint8Array {
  return canonicalBytes(leaf)
}

/** Parses a leaf's data: canonical, exactly its members, a known event. */
export function parseLogLeaf(bytes: Uint8Array): Result<LogLeaf, Failure<ShapeCode | CanonicalJsonCode>> {
  const json = parseCanonicalJson(bytes)
  if (!json.ok) return json
  return readShape<LogLeaf>(() => {
    const names = ['at', 'digest', 'draw', 'event', 'format', 'kind', 'note', 'organisation', 'supersedes'] as const
    const m = members(json.value, names, '')
    return {
      at: time(m.at, 'at'),
      digest: nullable(m.digest, (v) => hex(v, 32, 'digest')),
      draw: nullable(m.draw, (v) => text(v, 'draw')),
      event: oneOf(m.event, LOG_EVENTS, 'event'),
      format: oneOf(m.format, [FORMAT], 'format'),
      kind: oneOf(m.kind, ['log'], 'kind'),
      note: nullable(m.note, (v) => hex(v, 32, 'note')),
      organisation: text(m.organisation, 'organisation'),
      supersedes: nullable(m.supersedes, (v) => hex(v, 32, 'supersedes')),
    }
  })
}

/** note = SHA256(0x07 || salt || text): a reason that can be taken down while its digest stays. Salt of 32 bytes. */
export function noteDigest(sha256: Sha256, salt: Uint8Array, words: string): Uint8Array {
  if (salt.length !== 32) throw new RangeError('a note salt has 32 bytes')
  return sha256(concatBytes(Uint8Array.of(7), salt, utf8(words)))
}
