import { assertBytes } from './bytes.ts'

const DIGITS = '0123456789abcdef'
const PAIRS = Array.from({ length: 256 }, (_, byte) => `${DIGITS[byte >> 4]}${DIGITS[byte & 15]}`)

/** Lower-case hex of a byte string. */
export function toHex(bytes: Uint8Array): string {
  assertBytes(bytes, 'bytes')
  let hex = ''
  for (const byte of bytes) hex += PAIRS[byte]
  return hex
}

/** Whether `value` is lower-case hex of exactly `length` bytes. */
export function isHex(value: unknown, length: number): value is string {
  return typeof value === 'string' && value.length === length * 2 && /^[0-9a-f]*$/.test(value)
}

/** Bytes from lower-case hex; null for capitals, an odd length, other characters, or a length other than `length`. */
export function fromHex(hex: string, length?: number): Uint8Array | null {
  if (typeof hex !== 'string' || hex.length % 2 !== 0 || !/^[0-9a-f]*$/.test(hex)) return null
  if (length !== undefined && hex.length !== length * 2) return null
  const bytes = new Uint8Array(hex.length / 2)
  for (let i = 0; i < bytes.length; i += 1) {
    bytes[i] = (nibble(hex.charCodeAt(2 * i)) << 4) | nibble(hex.charCodeAt(2 * i + 1))
  }
  return bytes
}

/** Bytes of hex that was validated before; throws a RangeError where it was not. */
export function hexBytes(hex: string, length?: number): Uint8Array {
  const bytes = fromHex(hex, length)
  if (bytes === null) throw new RangeError('lower-case hex of the right length was expected')
  return bytes
}

function nibble(code: number): number {
  return code < 58 ? code - 48 : code - 87
}
