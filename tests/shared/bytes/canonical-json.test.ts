import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { canonicalBytes, canonicalText, parseCanonicalJson } from '#shared/bytes/canonical-json.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { parseStrictJson } from '#shared/bytes/strict-json.ts'

interface Jcs {
  cases: { name: string; input_utf8: string; canonical_hex: string; canonical_sha256: string }[]
  es6_number_samples: [string, string][]
  es6_numgen_checksums: { sha256: string; lines: number }[]
  static_u64s: string[]
}
// The RFC 8785 author's repository, cyberphone/json-canonicalization, testdata.
const jcs = JSON.parse(readFileSync(join(import.meta.dirname, '../../outside/rfc8785_jcs.json'), 'utf8')) as Jcs
const numberOf = (hex: string): number => {
  const view = new DataView(new ArrayBuffer(8))
  view.setBigUint64(0, BigInt(`0x${hex}`))
  return view.getFloat64(0)
}

describe('RFC 8785', () => {
  test.each(jcs.cases)('$name', ({ input_utf8, canonical_hex, canonical_sha256 }) => {
    const bytes = canonicalBytes(JSON.parse(input_utf8))
    expect(toHex(bytes)).toBe(canonical_hex)
    expect(toHex(sha256(bytes))).toBe(canonical_sha256)
    const parsed = parseCanonicalJson(bytes)
    expect(parsed.ok && toHex(canonicalBytes(parsed.value))).toBe(canonical_hex)
    if (utf8(input_utf8).length !== bytes.length) expect(parseCanonicalJson(utf8(input_utf8)).ok).toBe(false)
  })

  test('number samples, and 100,000 generated numbers by their published checksums', () => {
    for (const [hex, text] of jcs.es6_number_samples) expect(canonicalText(numberOf(hex))).toBe(text)
    // The order of testdata/numgen.js: the static numbers, 2,000 from the smallest normal one on, then the four
    // little-endian doubles of each link of a chain of SHA-256 that begins with 32 zero bytes.
    const lines: string[] = []
    const add = (bits: bigint): void => {
      const hex = bits.toString(16)
      const number = numberOf(hex)
      if (Number.isFinite(number)) lines.push(`${hex},${canonicalText(number)}\n`)
    }
    for (const hex of jcs.static_u64s) add(BigInt(`0x${hex}`))
    for (let i = 0n; i < 2000n; i += 1n) add(0x0010000000000000n + i)
    for (let block = Buffer.alloc(32); lines.length < 100_000; ) {
      block = Buffer.from(sha256(block))
      for (let i = 0; i < 4; i += 1) add(block.readBigUInt64LE(i * 8))
    }
    for (const { lines: count, sha256: sum } of jcs.es6_numgen_checksums.slice(0, 3)) {
      expect(toHex(sha256(utf8(lines.slice(0, count).join(''))))).toBe(sum)
    }
  })
})

describe('the parser of signed bytes', () => {
  const code = (text: string): string => {
    const parsed = parseCanonicalJson(utf8(text))
    return parsed.ok ? 'ok' : parsed.error.code
  }
  test.each([
    ['{"a":1,"b":[true,null,"é"]}', 'ok'],
    ['0', 'ok'],
    ['9007199254740991', 'ok'],
    ['{"a":1, "b":2}', 'not-canonical'],
    ['{"b":1,"a":2}', 'not-canonical'],
    ['{"a":1}\n', 'not-canonical'],
    ['"\\u0041"', 'not-canonical'],
    ['"\\/"', 'not-canonical'],
    ['{"a":1,"a":1}', 'duplicate-member'],
    ['{"a":1,"\\u0061":1}', 'duplicate-member'],
    ['{"x":{"a":1,"a":2}}', 'duplicate-member'],
    ['01', 'not-json'],
    ['-0', 'number-not-canonical'],
    ['1.0', 'number-not-canonical'],
    ['1e3', 'number-not-canonical'],
    ['9007199254740993', 'number-not-canonical'],
    ['1e400', 'number-not-canonical'],
    ['+1', 'not-json'],
    ['NaN', 'not-json'],
    ['', 'not-json'],
    ['{"a":1}{}', 'not-json'],
    ["{'a':1}", 'not-json'],
    ['[1,]', 'not-json'],
    ['"\\ud800"', 'lone-surrogate'],
    ['[[[[[[[[[[[[[[[[[1]]]]]]]]]]]]]]]]]', 'too-deep'],
    ['[[[[[[[[[[[[[[[[1]]]]]]]]]]]]]]]]', 'ok'],
    ['["[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[[["]', 'ok'],
    ['{"__proto__":1}', 'ok'],
  ])('%s is %s', (text, expected) => {
    expect(code(text)).toBe(expected)
  })

  test('bytes that are not UTF-8, and a byte order mark, are refused', () => {
    expect(parseCanonicalJson(Uint8Array.of(0x22, 0xff, 0x22))).toMatchObject({ error: { code: 'not-utf8' } })
    expect(parseCanonicalJson(Uint8Array.of(0xef, 0xbb, 0xbf, 0x31)).ok).toBe(false)
  })

  test('nesting of a million levels is refused, not overflowed', () => {
    expect(code('['.repeat(1_000_000))).toBe('too-deep')
    expect(parseStrictJson('['.repeat(1_000_000), 32)).toMatchObject({ error: { code: 'too-deep' } })
  })

  test('a member called __proto__ is only a member', () => {
    const parsed = parseStrictJson('{"__proto__":{"a":1}}', 4)
    expect(parsed.ok && Object.keys(parsed.value as object)).toEqual(['__proto__'])
  })

  test('whatever is written canonically is read back, and any other spelling of it refused', () => {
    fc.assert(
      fc.property(fc.jsonValue({ maxDepth: 5 }), (value) => {
        const text = canonicalText(value)
        expect(code(text)).toBe('ok')
        const spaced = JSON.stringify(value, null, 2)
        const strict = parseStrictJson(spaced, 16)
        expect(strict.ok && canonicalText(strict.value)).toBe(text)
        if (spaced !== text) expect(code(spaced)).not.toBe('ok')
      }),
      { seed: 11, numRuns: 300 },
    )
  })
})

test.each([[Number.NaN], [Number.POSITIVE_INFINITY], ['\ud800'], [{ a: '\udc00' }], [undefined]])(
  'nothing canonical is made of %s',
  (value) => {
    expect(() => canonicalBytes(value)).toThrow()
  },
)
