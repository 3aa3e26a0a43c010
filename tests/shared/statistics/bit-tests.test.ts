import { createHash } from 'node:crypto'
import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import {
  approximateEntropyTest,
  blockFrequencyTest,
  cumulativeSumsTest,
  frequencyTest,
  runsTest,
  serialTest,
} from '#shared/statistics/bit-tests.ts'
import { FIPS_BLOCK, fipsFailures } from '#shared/statistics/fips-140-2.ts'
import { constantBits } from '#tests/support/constant-bits.ts'
import { derivedBits } from '#tests/support/derived-bits.ts'

// NIST SP 800-22 revision 1a, examples of section 2 and P-values of appendix B; the file says where each was read.
const nist = JSON.parse(readFileSync('tests/outside/nist_sp800_22.json', 'utf8'))
const bitsOf = (text: string) => Uint8Array.from(text, Number)
type Example = { test: string; bits: string; p: number; M?: number; seen: string }

describe('the standard’s own examples', () => {
  const tests: Record<string, (bits: Uint8Array, m: number) => number> = {
    frequency: frequencyTest,
    block_frequency: blockFrequencyTest,
    runs: runsTest,
    cusum_forward: cumulativeSumsTest,
  }
  test.each(nist.section2_examples as Example[])('$test of $bits', (example) => {
    // One of them was set down from memory: a millionth is its last digit.
    expect(tests[example.test]?.(bitsOf(example.bits), example.M ?? 0)).toBeCloseTo(example.p, 5)
  })
})

describe('a million digits of each constant', () => {
  test.each(['pi', 'e', 'sqrt2', 'sqrt3'] as const)('%s', (name) => {
    const text = constantBits(name, 1_000_000)
    expect(createHash('sha256').update(text).digest('hex')).toBe(nist.bits_sha256_of_ascii_1e6[name])
    const bits = bitsOf(text)
    const published = (key: string) => nist.appendixB_P_values[key][name]
    expect(frequencyTest(bits)).toBeCloseTo(published('frequency'), 6)
    expect(blockFrequencyTest(bits, 128)).toBeCloseTo(published('block_frequency_m128'), 6)
    expect(runsTest(bits)).toBeCloseTo(published('runs'), 6)
    expect(cumulativeSumsTest(bits)).toBeCloseTo(published('cusum_forward'), 6)
    expect(serialTest(bits, 16)[0]).toBeCloseTo(published('serial_m16'), 6)
    expect(approximateEntropyTest(bits, 10)).toBeCloseTo(published('approximate_entropy_m10'), 6)
  })
})

describe('the flips of derived draws', () => {
  const bits = derivedBits('statistics in the suite', 1_000_000)
  test('pass the tests of NIST SP 800-22 at the level of one in ten thousand', () => {
    const values = [
      frequencyTest(bits),
      blockFrequencyTest(bits, 128),
      runsTest(bits),
      cumulativeSumsTest(bits),
      ...serialTest(bits, 16),
      approximateEntropyTest(bits, 10),
    ]
    for (const p of values) expect(p).toBeGreaterThan(0.0001)
  })
  test('pass FIPS 140-2 in all but at most one of fifty blocks', () => {
    const failed = Array.from({ length: 50 }, (_, i) =>
      fipsFailures(bits.subarray(i * FIPS_BLOCK, (i + 1) * FIPS_BLOCK)),
    )
    expect(failed.filter((tests) => tests.length > 0).length).toBeLessThanOrEqual(1)
  })
  test.each([
    ['one flip in 50 turned to heads', (i: number, bit: number) => (i % 50 === 0 ? 0 : bit), frequencyTest],
    [
      'one flip in 100 a copy of the last',
      (i: number, bit: number, last: number) => (i % 100 === 0 ? last : bit),
      runsTest,
    ],
    [
      'one flip in 100 told by the two before',
      (i: number, bit: number, last: number, before: number) => (i % 100 === 0 ? last ^ before : bit),
      (b: Uint8Array) => serialTest(b, 3)[1],
    ],
  ] as const)('%s is noticed', (_name, skew, fails) => {
    const skewed = bits.slice()
    for (let i = 2; i < skewed.length; i += 1) {
      skewed[i] = skew(i, skewed[i] as number, skewed[i - 1] as number, skewed[i - 2] as number)
    }
    expect(fails(skewed)).toBeLessThan(0.000_001)
    expect(fails(bits)).toBeGreaterThan(0.0001)
  })
})

describe('FIPS 140-2', () => {
  const good = derivedBits('a block', FIPS_BLOCK)
  test('each test fails for its own fault', () => {
    expect(fipsFailures(good)).toEqual([])
    expect(fipsFailures(good.map((bit, i) => (i % 12 === 0 ? 1 : bit)))).toContain('monobit')
    // Every second bit the opposite of the one before: as many ones as zeros, and no run above two.
    expect(fipsFailures(good.map((bit, i) => (i % 2 === 0 ? bit : 1 - (good[i - 1] as number))))).toEqual([
      'poker',
      'runs',
    ])
    const long = good.slice()
    long.fill(1, 100, 126)
    long[126] = 0
    long[99] = 0
    expect(fipsFailures(long)).toEqual(['long run'])
    long[100] = 0
    expect(fipsFailures(long)).toEqual([])
    expect(() => fipsFailures(good.subarray(1))).toThrow(RangeError)
  })
})
