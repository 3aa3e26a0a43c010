import { canonicalText, parseCanonicalJson, type CanonicalJsonCode } from '../bytes/canonical-json.ts'
import { utf8 } from '../bytes/bytes.ts'
import { hexBytes, toHex } from '../bytes/hex.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { labelCommitment } from './commitments.ts'
import { splitLines, type LinesCode } from './json-lines.ts'
import { MAX_ENTRANTS } from './limits.ts'
import type { ResultPick } from './result.ts'
import { hex, members, readShape, text, whole, type ShapeCode } from './shape.ts'

/** `labels.jsonl` (PROTOCOL section 8): opens the labels of picked leaves, in the order of each leaf's first pick. */

/** An opened label: the words that announce a leaf, and the 32-byte salt in hex. */
export interface OpenedLabel {
  readonly label: string
  readonly labelSalt: string
  readonly leaf: number
}

/** Why opened labels are refused. */
export type LabelsCode =
  | ShapeCode
  | CanonicalJsonCode
  | LinesCode
  | 'leaf-not-picked'
  | 'label-twice'
  | 'label-order'
  | 'label-mismatch'

/** One line: JCS and a line feed. */
export function labelLine({ label, labelSalt, leaf }: OpenedLabel): string {
  return `${canonicalText({ label, labelSalt, leaf })}\n`
}

/** The file's bytes; labels in the order of their leaf's first pick. */
export function labelsBytes(labels: readonly OpenedLabel[]): Uint8Array {
  return utf8(labels.map(labelLine).join(''))
}

/** Parses the file's lines; whether they belong to the picks is for `checkLabels` to say. */
export function parseLabels(
  bytes: Uint8Array,
): Result<readonly OpenedLabel[], Failure<ShapeCode | CanonicalJsonCode | LinesCode>> {
  const lines = splitLines(bytes)
  if (!lines.ok) return lines
  const labels: OpenedLabel[] = []
  for (const [i, line] of lines.value.entries()) {
    const json = parseCanonicalJson(line)
    const label = json.ok ? readShape<OpenedLabel>(() => readLabel(json.value)) : json
    if (!label.ok) return fail(label.error.code, `line ${i + 1} ${label.error.at}`.trimEnd(), label.error.message)
    labels.push(label.value)
  }
  return ok(labels)
}

/**
 * Checks opened labels against the picks of a result: only picked leaves, each once, in the order of their first pick,
 * and each opening its commitment. A picked leaf without a line is "label withheld", no failure.
 */
export function checkLabels(
  sha256: Sha256,
  labels: readonly OpenedLabel[],
  picks: readonly Pick<ResultPick, 'leaf' | 'labelCommit'>[],
): Result<true, Failure<LabelsCode>> {
  const firstPick = new Map<number, number>()
  for (const [i, pick] of picks.entries()) if (!firstPick.has(pick.leaf)) firstPick.set(pick.leaf, i)
  const seen = new Set<number>()
  let last = -1
  for (const [i, { label, labelSalt, leaf }] of labels.entries()) {
    const at = `line ${i + 1}`
    const pick = firstPick.get(leaf)
    if (pick === undefined) return fail('leaf-not-picked', at, `Leaf ${leaf} was not picked.`)
    if (seen.has(leaf)) return fail('label-twice', at, `The label of leaf ${leaf} stands here twice.`)
    seen.add(leaf)
    if (pick < last) return fail('label-order', at, 'Labels stand in the order of first picks.')
    last = pick
    const commit = labelCommitment(sha256, hexBytes(labelSalt, 32), label)
    if (toHex(commit) !== picks[pick]?.labelCommit) {
      return fail('label-mismatch', at, `This label does not open the commitment of leaf ${leaf}.`)
    }
  }
  return ok(true)
}

function readLabel(value: unknown): OpenedLabel {
  const m = members(value, ['label', 'labelSalt', 'leaf'], '')
  return {
    label: text(m.label, 'label'),
    labelSalt: hex(m.labelSalt, 32, 'labelSalt'),
    leaf: whole(m.leaf, 0, MAX_ENTRANTS - 1, 'leaf'),
  }
}
