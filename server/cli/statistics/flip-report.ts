import {
  approximateEntropyTest,
  blockFrequencyTest,
  cumulativeSumsTest,
  frequencyTest,
  runsTest,
  serialTest,
} from '#shared/statistics/bit-tests.ts'
import { FIPS_BLOCK, fipsFailures, type FipsTest } from '#shared/statistics/fips-140-2.ts'
import { chiSquare } from '#shared/statistics/probability-values.ts'

/** The tests of the flips, a line each: NIST SP 800-22, FIPS 140-2, and a chi-square of their bytes as `ent` makes it. */
export function* flipLines(bits: Uint8Array): Generator<string> {
  const [serial, serial2] = serialTest(bits, 16)
  const tests: readonly (readonly [string, number])[] = [
    ['frequency', frequencyTest(bits)],
    ['frequency in blocks of 128', blockFrequencyTest(bits, 128)],
    ['runs', runsTest(bits)],
    ['cumulative sums', cumulativeSumsTest(bits)],
    ['serial, 16 flips', serial],
    ['serial, second difference', serial2],
    ['approximate entropy, 10 flips', approximateEntropyTest(bits, 10)],
  ]
  for (const [name, p] of tests) yield `${name.padEnd(32)} p = ${p.toFixed(6)}`
  const counts = new Float64Array(256)
  for (let i = 0; i < bits.length; i += 8) {
    let byte = 0
    for (let bit = 0; bit < 8; bit += 1) byte = byte * 2 + (bits[i + bit] as number)
    counts[byte] = (counts[byte] as number) + 1
  }
  const { value, p } = chiSquare(counts, new Float64Array(256).fill(bits.length / 8 / 256))
  yield `${'bytes, chi-square of 255'.padEnd(32)} p = ${p.toFixed(6)} (${value.toFixed(2)})`
  yield fipsLine(bits)
}

function fipsLine(bits: Uint8Array): string {
  const blocks = Math.floor(bits.length / FIPS_BLOCK)
  const failures = new Map<FipsTest, number>()
  let failed = 0
  for (let block = 0; block < blocks; block += 1) {
    const tests = fipsFailures(bits.subarray(block * FIPS_BLOCK, (block + 1) * FIPS_BLOCK))
    if (tests.length > 0) failed += 1
    for (const test of tests) failures.set(test, (failures.get(test) ?? 0) + 1)
  }
  const which = [...failures].map(([test, count]) => `${test} ${count}`).join(', ')
  return `FIPS 140-2: ${blocks - failed} of ${blocks} blocks pass${which ? ` (${which} failed)` : ''}`
}
