import { canonicalBytes, parseCanonicalJson, type CanonicalJsonCode } from '#shared/bytes/canonical-json.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '#shared/bytes/result.ts'
import type { Checkpoint } from '#shared/log/checkpoint.ts'
import { logLeafHash, verifyLogInclusion } from '#shared/merkle/rfc9162.ts'
import { FORMAT } from '#shared/protocol/limits.ts'
import { parseLogLeaf, type LogLeaf } from '#shared/protocol/log-leaf.ts'
import { hex, list, members, oneOf, place, readShape, refuse, whole, type ShapeCode } from '#shared/protocol/shape.ts'

/** `log-proof.json` of the proof archive: the draw's log entries with their paths to the root of `checkpoint.txt`. */

/** An entry of the log with its leaf as it stands there, and the siblings from the leaf up (RFC 9162 section 2.1.3). */
export interface ProvenEntry {
  readonly index: number
  /** The JCS text of the leaf; its UTF-8 bytes are the leaf's data. */
  readonly text: string
  readonly leaf: LogLeaf
  readonly path: readonly Uint8Array[]
}

export type LogProofCode =
  | ShapeCode
  | CanonicalJsonCode
  | 'log-order'
  | 'log-inclusion'
  | 'log-draw'
  | 'log-event-missing'

/** A log of 2^53 leaves is 53 levels deep; a draw has a handful of entries. */
const MAX_PATH = 53
const MAX_ENTRIES = 100_000

/** Makes the member out of entries in ascending order. `leaf` is the leaf's data. */
export function logProofBytes(
  entries: readonly { readonly index: number; readonly text: string; readonly path: readonly Uint8Array[] }[],
): Uint8Array {
  return canonicalBytes({
    entries: entries.map(({ index, text, path }) => ({ index, leaf: text, path: path.map(toHex) })),
    format: FORMAT,
    kind: 'log-proof',
  })
}

/** Reads the member strictly: canonical, ascending, every leaf a leaf of the log. Nothing is proven yet. */
export function parseLogProof(bytes: Uint8Array): Result<readonly ProvenEntry[], Failure<LogProofCode>> {
  const json = parseCanonicalJson(bytes)
  if (!json.ok) return json
  return readShape<readonly ProvenEntry[], LogProofCode>(() => {
    const m = members(json.value, ['entries', 'format', 'kind'], '')
    oneOf(m.format, [FORMAT], 'format')
    oneOf(m.kind, ['log-proof'], 'kind')
    const items = list(m.entries, 'entries')
    if (items.length > MAX_ENTRIES) refuse('value-wrong', 'entries', `No draw has more than ${MAX_ENTRIES} entries.`)
    let before = -1
    return items.map((item, i) => {
      const entry = readEntry(item, `entries[${i}]`)
      if (entry.index <= before) refuse('log-order', `entries[${i}].index`, 'The entries do not stand in their order.')
      before = entry.index
      return entry
    })
  })
}

function readEntry(value: unknown, at: string): ProvenEntry {
  const m = members(value, ['index', 'leaf', 'path'], at)
  const path = list(m.path, place(at, 'path'))
  if (path.length > MAX_PATH) refuse('value-wrong', place(at, 'path'), 'No path is that long.')
  if (typeof m.leaf !== 'string') return refuse('text-wrong', place(at, 'leaf'), 'A text was expected here.')
  const leaf = parseLogLeaf(utf8(m.leaf))
  if (!leaf.ok) return refuse(leaf.error.code, `${at}.leaf ${leaf.error.at}`.trimEnd(), leaf.error.message)
  return {
    index: whole(m.index, 0, Number.MAX_SAFE_INTEGER - 1, place(at, 'index')),
    text: m.leaf,
    leaf: leaf.value,
    path: path.map((item, i) => hexBytes(hex(item, 32, `${at}.path[${i}]`))),
  }
}

/** Whether an entry stands at its index in the log whose head is `checkpoint`. */
export function entryIsIn(
  sha256: Sha256,
  entry: Pick<ProvenEntry, 'index' | 'text' | 'path'>,
  checkpoint: Pick<Checkpoint, 'size' | 'root'>,
): boolean {
  const leafHash = logLeafHash(sha256, utf8(entry.text))
  const { index, path } = entry
  return verifyLogInclusion(sha256, { index, size: checkpoint.size, leafHash, proof: path, root: checkpoint.root })
}

/** What the log must say of a draw that has been drawn; digests in hex. */
export interface DrawnDraw {
  readonly draw: string
  readonly sealDigest: string
  readonly resultDigest: string
}

/**
 * Verifies that the log says of a draw what its archive says: every entry stands in the checkpoint's tree and speaks of
 * this draw; it opened before it was sealed, this very seal came next, and this very result after it. Returns the
 * entry that sealed it.
 */
export function checkLogProof(
  sha256: Sha256,
  entries: readonly ProvenEntry[],
  checkpoint: Pick<Checkpoint, 'size' | 'root'>,
  drawn: DrawnDraw,
): Result<{ readonly sealed: ProvenEntry }, Failure<LogProofCode>> {
  for (const [i, entry] of entries.entries()) {
    if (!entryIsIn(sha256, entry, checkpoint)) {
      const words = `Entry ${entry.index} does not lead to the root of the checkpoint of ${checkpoint.size} entries.`
      return fail('log-inclusion', `entries[${i}].path`, words)
    }
    if (entry.leaf.draw !== drawn.draw) {
      return fail('log-draw', `entries[${i}].leaf draw`, 'This entry of the log is about another draw.')
    }
  }
  const missing = (what: string) =>
    fail('log-event-missing' as const, 'entries', `No entry of the log says that the draw was ${what}.`)
  if (entries[0]?.leaf.event !== 'opened') return missing('opened, before everything else')
  const sealed = entries.find(({ leaf }) => SEALING.has(leaf.event) && leaf.digest === drawn.sealDigest)
  if (!sealed) return missing('sealed with this seal')
  const settled = entries.find(({ leaf }) => leaf.event === 'drawn' && leaf.digest === drawn.resultDigest)
  if (!settled || settled.index < sealed.index) return missing('drawn with this result, after its seal')
  const other = entries.find(
    ({ index, leaf }) => SEALING.has(leaf.event) && index > sealed.index && index < settled.index,
  )
  if (other) {
    return fail('log-event-missing', 'entries', `Entry ${other.index} of the log names a seal after this one.`)
  }
  return ok({ sealed })
}

/** Events whose digest is that of a seal. */
const SEALING: ReadonlySet<string> = new Set(['sealed', 'replaced'])
