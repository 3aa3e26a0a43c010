import canonicalize from 'canonicalize'
import { decodeUtf8, equalBytes, utf8 } from './bytes.ts'
import { fail, ok, type Failure, type Result } from './result.ts'
import { parseStrictJson, type JsonValue, type StrictJsonCode } from './strict-json.ts'

export type { JsonValue } from './strict-json.ts'

/** Why bytes are not the canonical JSON of anything. */
export type CanonicalJsonCode = StrictJsonCode | 'not-utf8' | 'not-canonical'

/** Deepest nesting of arrays and objects that any record has or may have. */
export const MAX_DEPTH = 16

/**
 * The JCS bytes of a value (RFC 8785). Throws for what JSON cannot hold: NaN, infinities, lone surrogates, cycles,
 * undefined at the top.
 */
export function canonicalBytes(value: unknown): Uint8Array {
  return utf8(canonicalText(value))
}

/** The JCS text of a value (RFC 8785); its UTF-8 bytes are what is hashed and signed. */
export function canonicalText(value: unknown): string {
  const text = canonicalize(value)
  if (text === undefined) throw new TypeError('this value has no JSON form')
  return text
}

/**
 * Parses bytes that must be exactly the JCS form of what they hold. That refuses white space, members out of order,
 * doubled members, numbers spelt otherwise (`1.0`, `1e3`, `-0`, beyond 2^53) and escapes spelt otherwise; nesting
 * deeper than `MAX_DEPTH` is refused before anything recurses.
 */
export function parseCanonicalJson(bytes: Uint8Array): Result<JsonValue, Failure<CanonicalJsonCode>> {
  const text = decodeUtf8(bytes)
  if (text === null) return fail('not-utf8', '', 'These bytes are not UTF-8 text.')
  if (tooDeep(text)) return fail('too-deep', '', `This is nested deeper than ${MAX_DEPTH} levels.`)
  let value: JsonValue
  try {
    value = JSON.parse(text) as JsonValue
    if (equalBytes(canonicalBytes(value), bytes)) return ok(value)
  } catch {
    // Told below, with the place.
  }
  const strict = parseStrictJson(text, MAX_DEPTH)
  if (!strict.ok) return strict
  return fail('not-canonical', '', 'These bytes are not the canonical JSON (RFC 8785) of what they hold.')
}

function tooDeep(text: string): boolean {
  let depth = 0
  let inString = false
  for (let i = 0; i < text.length; i += 1) {
    const code = text.charCodeAt(i)
    if (inString) {
      if (code === 0x5c) i += 1
      else if (code === 0x22) inString = false
    } else if (code === 0x22) inString = true
    else if (code === 0x5b || code === 0x7b) {
      depth += 1
      if (depth > MAX_DEPTH) return true
    } else if (code === 0x5d || code === 0x7d) depth -= 1
  }
  return false
}
