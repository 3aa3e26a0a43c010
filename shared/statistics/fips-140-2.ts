import type { Bits } from './bit-tests.ts'

/** Bits of one block. */
export const FIPS_BLOCK = 20_000

/** Runs of 1, 2, 3, 4, 5 and of 6 or more equal bits, of ones and of zeros each: least and most. */
const RUNS = [
  [2315, 2685],
  [1114, 1386],
  [527, 723],
  [240, 384],
  [103, 209],
  [103, 209],
] as const
const LONG_RUN = 26

export type FipsTest = 'monobit' | 'poker' | 'runs' | 'long run'

/**
 * The four tests of a generator's bits in FIPS 140-2 section 4.9.1 (2001, before change notice 2 took them out), limits
 * from memory and equal to those that Debian's rng-tools5 applies: which of them a block of 20,000 bits fails. A fair source fails
 * one block in about 1,250. Throws a RangeError for a block of another length.
 */
export function fipsFailures(bits: Bits): readonly FipsTest[] {
  if (bits.length !== FIPS_BLOCK) throw new RangeError(`a block has ${FIPS_BLOCK} bits`)
  let ones = 0
  for (let i = 0; i < FIPS_BLOCK; i += 1) ones += bits[i] as number
  const { counts, longest } = runsOf(bits)
  const poker = pokerOf(bits)
  const failed: FipsTest[] = []
  if (ones <= 9725 || ones >= 10_275) failed.push('monobit')
  if (poker <= 2.16 || poker >= 46.17) failed.push('poker')
  const runsHold = counts.every((row) =>
    row.every((count, index) => {
      const [least, most] = RUNS[index] as readonly [number, number]
      return count >= least && count <= most
    }),
  )
  if (!runsHold) failed.push('runs')
  if (longest >= LONG_RUN) failed.push('long run')
  return failed
}

/** 5,000 groups of four bits: 16/5000 × the sum of squared counts, less 5000. */
function pokerOf(bits: Bits): number {
  const counts = new Float64Array(16)
  for (let i = 0; i < FIPS_BLOCK; i += 4) {
    const four = [0, 1, 2, 3].reduce((value, j) => value * 2 + (bits[i + j] as number), 0)
    counts[four] = (counts[four] as number) + 1
  }
  return (16 / 5000) * counts.reduce((sum, count) => sum + count * count, 0) - 5000
}

function runsOf(bits: Bits): { readonly counts: readonly [number[], number[]]; readonly longest: number } {
  const counts: [number[], number[]] = [
    [0, 0, 0, 0, 0, 0],
    [0, 0, 0, 0, 0, 0],
  ]
  let [longest, length] = [0, 0]
  for (let i = 0; i < FIPS_BLOCK; i += 1) {
    length += 1
    if (i + 1 < FIPS_BLOCK && bits[i + 1] === bits[i]) continue
    const row = counts[bits[i] === 1 ? 1 : 0]
    const place = Math.min(length, 6) - 1
    row[place] = (row[place] as number) + 1
    longest = Math.max(longest, length)
    length = 0
  }
  return { counts, longest }
}
