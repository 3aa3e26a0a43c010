import { concatBytes, equalBytes } from '#shared/bytes/bytes.ts'
import { parseTime } from '#shared/bytes/time.ts'

/**
 * A strict reader and a small writer of DER (ITU-T X.690), for timestamps and certificates out of strangers' hands. Values
 * are looked into one level at a time, so that no depth of nesting costs anything; every length is minimal and definite.
 */

/** The bytes are not the DER that was expected here. */
export class DerError extends Error {}

export const TAG = {
  boolean: 0x01,
  integer: 0x02,
  bitString: 0x03,
  octetString: 0x04,
  nothing: 0x05,
  oid: 0x06,
  enumerated: 0x0a,
  utf8: 0x0c,
  utcTime: 0x17,
  generalizedTime: 0x18,
  sequence: 0x30,
  set: 0x31,
} as const

/** The tag of a context-specific element: `[number]`, constructed unless it says otherwise. */
export const context = (number: number, form: 'constructed' | 'primitive' = 'constructed'): number =>
  (form === 'constructed' ? 0xa0 : 0x80) | number

/** One element: its tag byte, all its bytes, and those of its content. */
export interface Der {
  readonly tag: number
  readonly whole: Uint8Array
  readonly content: Uint8Array
}

/** No sequence of a timestamp or a certificate has more elements. */
const MAX_CHILDREN = 1000

/** Reads the element that begins at `at`. */
function readAt(bytes: Uint8Array, at: number): Der {
  const tag = bytes[at]
  const first = bytes[at + 1]
  if (tag === undefined || first === undefined) throw new DerError('It ends in the middle.')
  if ((tag & 0x1f) === 0x1f) throw new DerError('A tag has more than one byte.')
  let start = at + 2
  let length = first
  if (first >= 0x80) {
    const octets = first & 0x7f
    if (octets < 1 || octets > 4) throw new DerError('A length is indefinite or too long.')
    length = 0
    for (let i = 0; i < octets; i += 1) length = length * 256 + (bytes[start + i] ?? 0)
    start += octets
    if (length < 0x80 || length < 256 ** (octets - 1))
      throw new DerError('A length is not written as shortly as it can be.')
  }
  const end = start + length
  if (end > bytes.length) throw new DerError('It ends in the middle.')
  return { tag, whole: bytes.subarray(at, end), content: bytes.subarray(start, end) }
}

/** Reads bytes that are exactly one element of this tag. Throws a DerError. */
export function readDer(bytes: Uint8Array, tag: number): Der {
  const node = readAt(bytes, 0)
  if (node.whole.length !== bytes.length) throw new DerError('There are bytes behind its end.')
  return expectTag(node, tag)
}

/** Throws a DerError unless the element has this tag. */
export function expectTag(node: Der, tag: number): Der {
  if (node.tag !== tag) throw new DerError(`An element of type ${tag} was expected, and ${node.tag} stands there.`)
  return node
}

/** The elements of a constructed one, in their order. */
export function childrenOf(node: Der): readonly Der[] {
  const found: Der[] = []
  for (let at = 0; at < node.content.length; ) {
    const child = readAt(node.content, at)
    if (found.push(child) > MAX_CHILDREN) throw new DerError('It has too many elements.')
    at += child.whole.length
  }
  return found
}

/** Goes through the elements of a sequence: the ones that must be there, and those that may. */
export class DerFields {
  readonly #children: readonly Der[]
  #next = 0

  constructor(node: Der, tag: number = TAG.sequence) {
    this.#children = childrenOf(expectTag(node, tag))
  }

  /** The next element, of any tag. */
  any(): Der {
    const child = this.#children[this.#next]
    if (!child) throw new DerError('An element is missing.')
    this.#next += 1
    return child
  }

  take(tag: number): Der {
    return expectTag(this.any(), tag)
  }

  /** The next element where it has this tag, else null. */
  optional(tag: number): Der | null {
    return this.#children[this.#next]?.tag === tag ? this.any() : null
  }

  /** Throws a DerError where something is left that is not known. */
  end(): void {
    if (this.#next < this.#children.length) throw new DerError('There is an element too many.')
  }
}

/** An object identifier in its dotted form. */
export function oidOf(node: Der): string {
  const { content } = expectTag(node, TAG.oid)
  if (content.length === 0 || content.length > 64) throw new DerError('An object identifier has no such length.')
  const arcs: number[] = []
  let arc = 0
  let begun = false
  for (const byte of content) {
    if (!begun && byte === 0x80) throw new DerError('An object identifier is not written as shortly as it can be.')
    arc = arc * 128 + (byte & 0x7f)
    if (!Number.isSafeInteger(arc)) throw new DerError('An object identifier is too large.')
    begun = byte >= 0x80
    if (begun) continue
    if (arcs.length === 0) {
      const top = Math.min(2, Math.floor(arc / 40))
      arcs.push(top, arc - 40 * top)
    } else arcs.push(arc)
    arc = 0
  }
  if (begun) throw new DerError('An object identifier ends in the middle.')
  return arcs.join('.')
}

/** The bytes of an integer, as short as they can be: two's complement, big-endian. */
export function integerBytes(node: Der): Uint8Array {
  const { content } = expectTag(node, TAG.integer)
  const [first, second] = content
  if (first === undefined) throw new DerError('An integer has no bytes.')
  if (second !== undefined && ((first === 0 && second < 0x80) || (first === 0xff && second >= 0x80))) {
    throw new DerError('An integer is not written as shortly as it can be.')
  }
  return content
}

/** An integer from 0 to 2^53 − 1. */
export function wholeOf(node: Der): number {
  const content = integerBytes(node)
  if (content[0] !== undefined && content[0] >= 0x80) throw new DerError('A number is below 0.')
  let value = 0
  for (const byte of content) value = value * 256 + byte
  if (!Number.isSafeInteger(value)) throw new DerError('A number is too large.')
  return value
}

export function booleanOf(node: Der): boolean {
  const { content } = expectTag(node, TAG.boolean)
  if (content.length !== 1 || (content[0] !== 0 && content[0] !== 0xff)) throw new DerError('A truth value is neither.')
  return content[0] === 0xff
}

/** The bytes of a bit string of whole bytes. */
export function bitStringBytes(node: Der): Uint8Array {
  const { content } = expectTag(node, TAG.bitString)
  if (content[0] !== 0) throw new DerError('A bit string does not end with a whole byte.')
  return content.subarray(1)
}

/** Seconds since 1970 of a UTCTime or a GeneralizedTime in UTC; a fraction is given apart (X.690 section 11.7). */
export function timeOf(node: Der): { readonly seconds: number; readonly fraction: number } {
  const text = String.fromCharCode(...node.content.subarray(0, 64))
  const utc = node.tag === TAG.utcTime ? /^(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)Z$/.exec(text) : null
  const general =
    node.tag === TAG.generalizedTime ? /^(\d{4})(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)(\.\d{0,8}[1-9])?Z$/.exec(text) : null
  const [, year, month, day, hour, minute, second, fraction] = general ?? utc ?? []
  // RFC 5280 section 4.1.2.5.1: two digits from 50 on are of the last century.
  const whole = utc ? `${Number(year) < 50 ? '20' : '19'}${year}` : year
  const seconds = parseTime(`${whole}-${month}-${day}T${hour}:${minute}:${second}Z`)
  if (seconds === null) throw new DerError('A time is not one in UTC.')
  return { seconds, fraction: fraction === undefined ? 0 : Number(`0${fraction}`) }
}

/** Whether two elements are the same bytes. */
export const sameDer = (left: Der, right: Der): boolean => equalBytes(left.whole, right.whole)

/** Writes an element. */
export function der(tag: number, ...content: readonly Uint8Array[]): Uint8Array {
  const body = concatBytes(...content)
  const { length } = body
  if (length < 0x80) return concatBytes(Uint8Array.of(tag, length), body)
  const octets: number[] = []
  for (let rest = length; rest > 0; rest = Math.floor(rest / 256)) octets.unshift(rest % 256)
  return concatBytes(Uint8Array.of(tag, 0x80 | octets.length, ...octets), body)
}

/** Writes an integer out of big-endian bytes of a number that is not negative. */
export function derInteger(bytes: Uint8Array): Uint8Array {
  let start = 0
  while (start < bytes.length - 1 && bytes[start] === 0) start += 1
  const body = bytes.length === 0 ? Uint8Array.of(0) : bytes.subarray(start)
  return der(TAG.integer, ...((body[0] ?? 0) >= 0x80 ? [Uint8Array.of(0), body] : [body]))
}

/** Writes an object identifier out of its dotted form. */
export function derOid(dotted: string): Uint8Array {
  const [top = 0, second = 0, ...arcs] = dotted.split('.').map(Number)
  const bytes = [top * 40 + second, ...arcs].flatMap((arc) => {
    const septets = [arc % 128]
    for (let rest = Math.floor(arc / 128); rest > 0; rest = Math.floor(rest / 128)) septets.unshift(0x80 | (rest % 128))
    return septets
  })
  return der(TAG.oid, Uint8Array.from(bytes))
}
