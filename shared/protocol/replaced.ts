import { canonicalBytes, parseCanonicalJson, type CanonicalJsonCode } from '#shared/bytes/canonical-json.ts'
import type { Failure, Result } from '#shared/bytes/result.ts'
import { FORMAT, MAX_ENTRANTS } from '#shared/protocol/limits.ts'
import { hex, list, members, oneOf, place, readShape, refuse, type ShapeCode, whole } from '#shared/protocol/shape.ts'

/** `replaced.json` of the proof archive: the seals that stood before the one in force, oldest first. */

/** A seal that was replaced, and how the list that came next differs, in entrants. */
export interface ReplacedSeal {
  readonly added: number
  readonly changed: number
  readonly removed: number
  /** Its digest, hex. */
  readonly seal: string
}

/** No draw is replaced so often. */
export const MAX_REPLACED = 1000

/** The member's bytes: JCS. */
export const replacedBytes = (seals: readonly ReplacedSeal[]): Uint8Array =>
  canonicalBytes({
    format: FORMAT,
    kind: 'replaced',
    seals: seals.map(({ added, changed, removed, seal }) => ({ added, changed, removed, seal })),
  })

/** Reads the member strictly: canonical, at least one seal. */
export function parseReplaced(
  bytes: Uint8Array,
): Result<readonly ReplacedSeal[], Failure<ShapeCode | CanonicalJsonCode>> {
  const json = parseCanonicalJson(bytes)
  if (!json.ok) return json
  return readShape<readonly ReplacedSeal[]>(() => {
    const m = members(json.value, ['format', 'kind', 'seals'], '')
    oneOf(m.format, [FORMAT], 'format')
    oneOf(m.kind, ['replaced'], 'kind')
    const seals = list(m.seals, 'seals')
    if (seals.length < 1 || seals.length > MAX_REPLACED) {
      refuse('value-wrong', 'seals', `From 1 to ${MAX_REPLACED} replaced seals were expected here.`)
    }
    return seals.map((item, i) => {
      const at = `seals[${i}]`
      const one = members(item, ['added', 'changed', 'removed', 'seal'], at)
      const count = (name: 'added' | 'changed' | 'removed') => whole(one[name], 0, MAX_ENTRANTS, place(at, name))
      return {
        added: count('added'),
        changed: count('changed'),
        removed: count('removed'),
        seal: hex(one.seal, 32, place(at, 'seal')),
      }
    })
  })
}
