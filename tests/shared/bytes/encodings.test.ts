import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { fromBase64, toBase64 } from '#shared/bytes/base64.ts'
import { concatBytes, decodeUtf8, u32, u64, utf8 } from '#shared/bytes/bytes.ts'
import { fromHex, isHex, toHex } from '#shared/bytes/hex.ts'
import { importTerms, importText, isTermsText, textProblem } from '#shared/bytes/text.ts'
import { formatTime, parseTime } from '#shared/bytes/time.ts'

describe('numbers as bytes', () => {
  test('big-endian, at the ends of their ranges', () => {
    expect(toHex(u32(0xdeadbeef))).toBe('deadbeef')
    expect(toHex(u64(2 ** 53 - 1))).toBe('001fffffffffffff')
    expect(toHex(u64(2 ** 32))).toBe('0000000100000000')
    expect(toHex(u64(0xffffffff))).toBe('00000000ffffffff')
    fc.assert(
      fc.property(fc.maxSafeNat(), (n) => {
        expect(BigInt(`0x${toHex(u64(n))}`)).toBe(BigInt(n))
      }),
      { seed: 3 },
    )
  })
  test.each([-1, 1.5, Number.NaN, 2 ** 53])('%s has no bytes', (n) => {
    expect(() => u64(n)).toThrow(RangeError)
    expect(() => u32(n)).toThrow(RangeError)
  })
  test('2^32 has no four bytes', () => {
    expect(() => u32(2 ** 32)).toThrow(RangeError)
  })
})

describe('hex and base64', () => {
  test.each(['A0', '0', '0g', ' 00', '00\n', '0x00'])('hex %j is refused', (text) => {
    expect(fromHex(text)).toBeNull()
    expect(isHex(text, 1)).toBe(false)
  })
  test('a length is exact', () => {
    expect(fromHex('0001', 2)).toEqual(Uint8Array.of(0, 1))
    expect(fromHex('0001', 1)).toBeNull()
    expect(isHex(['00'], 1)).toBe(false)
  })
  test('both agree with Node for any bytes', () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 100 }), (bytes) => {
        expect(toHex(bytes)).toBe(Buffer.from(bytes).toString('hex'))
        expect(fromHex(toHex(bytes))).toEqual(bytes)
        expect(toBase64(bytes)).toBe(Buffer.from(bytes).toString('base64'))
        expect(fromBase64(toBase64(bytes))).toEqual(bytes)
      }),
      { seed: 5 },
    )
  })
  // The vectors of RFC 4648 section 10, from memory.
  test.each([
    ['', ''],
    ['f', 'Zg=='],
    ['fo', 'Zm8='],
    ['foo', 'Zm9v'],
    ['foobar', 'Zm9vYmFy'],
  ])('base64 of %j', (text, base64) => {
    expect(toBase64(utf8(text))).toBe(base64)
  })
  test.each(['Zg', 'Zg=', 'Zh==', 'Zm9=', 'Z g==', 'Zg==\n', 'Zm9v=', '===='])('base64 %j is refused', (text) => {
    expect(fromBase64(text)).toBeNull()
  })
})

describe('text', () => {
  test.each([
    ['\u0000', 'control-character'],
    ['a\tb', 'control-character'],
    ['a\nb', 'control-character'],
    ['\u007f', 'control-character'],
    ['\u0085', 'control-character'],
    ['\u009f', 'control-character'],
    ['\u2028', 'line-separator'],
    ['\u2029', 'line-separator'],
    ['\u200e', 'bidirectional-control'],
    ['\u061c', 'bidirectional-control'],
    ['\u202e', 'bidirectional-control'],
    ['\u2066', 'bidirectional-control'],
    ['\ud83c', 'lone-surrogate'],
    ['\udf43\ud83c', 'lone-surrogate'],
    ['Zoë “🍃” مرحبا שלום \\ "', null],
    ['\u00a0\u200d\u200b', null],
  ])('%j: %s', (text, problem) => {
    expect(textProblem(text)).toBe(problem)
  })
  test('import composes, and terms end with one line feed', () => {
    expect(importText('Zoe\u0308')).toBe('Zoë')
    expect(importTerms('One.\r\nTwo.\r\r\n\n')).toBe('One.\nTwo.\n')
    expect(isTermsText('One.\nTwo.\n')).toBe(true)
    for (const bad of ['One.', 'One.\n\n', 'One.\r\n', 'O\tne.\n', 'One.\u2028\n', ''])
      expect(isTermsText(bad)).toBe(false)
  })
  test('a lone surrogate has no UTF-8, and malformed UTF-8 no text', () => {
    expect(() => utf8('\ud800')).toThrow(RangeError)
    expect(decodeUtf8(Uint8Array.of(0xc0, 0x80))).toBeNull()
    expect(decodeUtf8(Uint8Array.of(0xed, 0xa0, 0x80))).toBeNull()
    expect(decodeUtf8(Uint8Array.of(0xef, 0xbb, 0xbf, 0x41))).toBe('\ufeffA')
  })
  test.each([['text'], [[1, 2]], [null], [new Uint16Array(2)]])('%j is not bytes', (value) => {
    expect(() => concatBytes(value as unknown as Uint8Array)).toThrow(TypeError)
  })
})

describe('times', () => {
  test('agree with the Date of Node over ten thousand years', () => {
    fc.assert(
      fc.property(fc.integer({ min: -62_167_219_200, max: 253_402_300_799 }), (seconds) => {
        const text = new Date(seconds * 1000).toISOString().replace('.000Z', 'Z')
        expect(formatTime(seconds)).toBe(text)
        expect(parseTime(text)).toBe(seconds)
      }),
      { seed: 13, numRuns: 2000 },
    )
  })
  test.each([
    '2031-02-29T00:00:00Z',
    '2100-02-29T00:00:00Z',
    '2031-13-01T00:00:00Z',
    '2031-00-01T00:00:00Z',
    '2031-04-31T00:00:00Z',
    '2031-01-00T00:00:00Z',
    '2031-01-01T24:00:00Z',
    '2031-01-01T00:60:00Z',
    '2016-12-31T23:59:60Z',
    '2031-01-01T00:00:00.0Z',
    '2031-01-01T00:00:00+00:00',
    '2031-01-01 00:00:00Z',
    '2031-1-1T00:00:00Z',
    '2031-01-01t00:00:00z',
    '2031-01-01T00:00:00Z\n',
    '+02031-01-01T00:00:00Z',
    '٢٠٣١-01-01T00:00:00Z',
    1,
    null,
  ])('%j is no time of the record', (text) => {
    expect(parseTime(text)).toBeNull()
  })
  test('leap days that there are', () => {
    expect(parseTime('2000-02-29T00:00:00Z')).toBe(951_782_400)
    expect(parseTime('2032-02-29T23:59:59Z')).not.toBeNull()
  })
  test.each([1.5, Number.NaN, 253_402_300_800])('%s is written as no time', (seconds) => {
    expect(() => formatTime(seconds)).toThrow(RangeError)
  })
})
