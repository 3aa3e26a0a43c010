/** Byte strings are `Uint8Array` everywhere; text is refused where bytes are meant. */

interface Encoder {
  encode(text: string): Uint8Array
  encodeInto(text: string, target: Uint8Array): { written: number }
}
interface Decoder {
  decode(bytes: Uint8Array): string
}
// Node and every browser have both; the ES2022 library that this folder is compiled against does not declare them.
const platform = globalThis as unknown as {
  TextEncoder: new () => Encoder
  TextDecoder: new (label: string, options: { fatal: boolean; ignoreBOM: boolean }) => Decoder
}
const encoder = new platform.TextEncoder()

/** Throws a TypeError unless `value` is a Uint8Array (of `length` bytes, where given). */
export function assertBytes(value: unknown, name: string, length?: number): asserts value is Uint8Array {
  if (!(value instanceof Uint8Array)) throw new TypeError(`${name} must be bytes`)
  if (length !== undefined && value.length !== length) {
    throw new TypeError(`${name} must be ${length} bytes, not ${value.length}`)
  }
}

/** Joins byte strings: the `||` of the record format. Throws a TypeError for anything but bytes. */
export function concatBytes(...parts: readonly Uint8Array[]): Uint8Array {
  let length = 0
  for (const part of parts) {
    assertBytes(part, 'part')
    length += part.length
  }
  const joined = new Uint8Array(length)
  let offset = 0
  for (const part of parts) {
    joined.set(part, offset)
    offset += part.length
  }
  return joined
}

/**
 * Copies a short byte string into `target` at `offset`. A plain loop: for a salt or a digest, `set` takes several times
 * as long. Requires room for all of it.
 */
export function put(target: Uint8Array, offset: number, source: Uint8Array): void {
  for (let i = 0; i < source.length; i += 1) target[offset + i] = source[i] as number
}

/** Whether two byte strings are the same. Not constant in time: for public values only. */
export function equalBytes(left: Uint8Array, right: Uint8Array): boolean {
  if (left.length !== right.length) return false
  for (let i = 0; i < left.length; i += 1) if (left[i] !== right[i]) return false
  return true
}

/** Orders byte strings by their first differing byte, shorter first: negative, zero or positive. */
export function compareBytes(left: Uint8Array, right: Uint8Array): number {
  const shared = Math.min(left.length, right.length)
  for (let i = 0; i < shared; i += 1) {
    const difference = (left[i] as number) - (right[i] as number)
    if (difference !== 0) return difference
  }
  return left.length - right.length
}

/** Four bytes, big-endian. Requires an integer from 0 to 2^32 − 1; throws a RangeError otherwise. */
export function u32(value: number): Uint8Array {
  if (!Number.isInteger(value) || value < 0 || value > 0xffffffff) throw new RangeError(`u32 out of range: ${value}`)
  return Uint8Array.of(value >>> 24, (value >>> 16) & 0xff, (value >>> 8) & 0xff, value & 0xff)
}

/** Eight bytes, big-endian. Requires an integer from 0 to 2^53 − 1; throws a RangeError otherwise. */
export function u64(value: number): Uint8Array {
  const bytes = new Uint8Array(8)
  writeU64(bytes, 0, value)
  return bytes
}

/** Writes `u64(value)` into `target` at `offset` without allocating. Same range as `u64`. */
export function writeU64(target: Uint8Array, offset: number, value: number): void {
  if (!Number.isSafeInteger(value) || value < 0) throw new RangeError(`u64 out of range: ${value}`)
  const high = Math.floor(value / 0x100000000)
  const low = value >>> 0
  target[offset] = high >>> 24
  target[offset + 1] = high >>> 16
  target[offset + 2] = high >>> 8
  target[offset + 3] = high
  target[offset + 4] = low >>> 24
  target[offset + 5] = low >>> 16
  target[offset + 6] = low >>> 8
  target[offset + 7] = low
}

/** UTF-8 bytes. A lone surrogate has none, so it throws a RangeError instead of turning into U+FFFD. */
export function utf8(text: string): Uint8Array {
  if (hasLoneSurrogate(text)) throw new RangeError('text holds a lone surrogate')
  return encoder.encode(text)
}

/**
 * Writes the UTF-8 of `text` into `target` from `offset` on, without allocating, and returns the offset behind it.
 * Requires room for three bytes a UTF-16 unit; throws a RangeError otherwise, or for a lone surrogate.
 */
export function writeUtf8(target: Uint8Array, offset: number, text: string): number {
  if (offset + 3 * text.length > target.length) throw new RangeError('no room for this text')
  for (let i = 0; i < text.length; i += 1) {
    const code = text.charCodeAt(i)
    if (code > 0x7f) {
      if (hasLoneSurrogate(text)) throw new RangeError('text holds a lone surrogate')
      return offset + encoder.encodeInto(text, target.subarray(offset)).written
    }
    target[offset + i] = code
  }
  return offset + text.length
}

/** Text from UTF-8, or null where the bytes are not well-formed UTF-8. A byte order mark stays in the text. */
export function decodeUtf8(bytes: Uint8Array): string | null {
  assertBytes(bytes, 'bytes')
  try {
    return new platform.TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(bytes)
  } catch {
    return null
  }
}

/** Whether half of a surrogate pair stands alone in the text. */
export function hasLoneSurrogate(text: string): boolean {
  // Almost no text holds surrogates at all, and this first question is far cheaper.
  return /[\ud800-\udfff]/.test(text) && /\p{Surrogate}/u.test(text)
}
