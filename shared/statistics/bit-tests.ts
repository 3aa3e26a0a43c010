import { erfc, normal, upperGamma } from './special-functions.ts'

/** Bits, each 0 or 1. All tests: NIST SP 800-22 revision 1a, section 2; each gives its p. */
export type Bits = ArrayLike<number>

/** Section 2.1: as many ones as zeros. */
export function frequencyTest(bits: Bits): number {
  return erfc(Math.abs(2 * ones(bits, 0, bits.length) - bits.length) / Math.sqrt(2 * bits.length))
}

/** Section 2.2: as many in each block of `length`; bits behind the last whole block are left out. */
export function blockFrequencyTest(bits: Bits, length: number): number {
  const blocks = Math.floor(bits.length / length)
  let sum = 0
  for (let block = 0; block < blocks; block += 1) {
    sum += (ones(bits, block * length, (block + 1) * length) / length - 0.5) ** 2
  }
  return upperGamma(blocks / 2, 2 * length * sum)
}

/** Section 2.3: as many runs as independent bits with this share of ones have. */
export function runsTest(bits: Bits): number {
  const n = bits.length
  const share = ones(bits, 0, n) / n
  // The test's own condition: the share itself is already wrong.
  if (Math.abs(share - 0.5) >= 2 / Math.sqrt(n)) return 0
  let runs = 1
  for (let i = 1; i < n; i += 1) if (bits[i] !== bits[i - 1]) runs += 1
  const spread = share * (1 - share)
  return erfc(Math.abs(runs - 2 * n * spread) / (2 * Math.sqrt(2 * n) * spread))
}

/** Section 2.11: patterns of `length` and of one and two bits less, overlapping and round the end. Both p. */
export function serialTest(bits: Bits, length: number): readonly [number, number] {
  const [psi, psi1, psi2] = [0, 1, 2].map((less) => patternExcess(bits, length - less)) as [number, number, number]
  const [first, second] = [psi - psi1, psi - 2 * psi1 + psi2]
  return [upperGamma(2 ** (length - 2), first / 2), upperGamma(2 ** (length - 3), second / 2)]
}

/** Section 2.12: patterns of `length` against those one bit longer. */
export function approximateEntropyTest(bits: Bits, length: number): number {
  const phi = (m: number) => {
    let sum = 0
    for (const count of patterns(bits, m)) if (count > 0) sum += (count / bits.length) * Math.log(count / bits.length)
    return sum
  }
  const entropy = phi(length) - phi(length + 1)
  return upperGamma(2 ** (length - 1), bits.length * (Math.LN2 - entropy))
}

/** Section 2.13, forward: how far the sum of the bits, taken as -1 and 1, ever strays. */
export function cumulativeSumsTest(bits: Bits): number {
  const n = bits.length
  let [sum, z] = [0, 0]
  for (let i = 0; i < n; i += 1) {
    sum += bits[i] === 1 ? 1 : -1
    z = Math.max(z, Math.abs(sum))
  }
  const at = (k: number) => normal((k * z) / Math.sqrt(n))
  // Truncated towards zero, as the standard's reference program does.
  const range = (from: number, to: number) =>
    [Math.trunc((Math.trunc(-n / z) + from) / 4), Math.trunc((Math.trunc(n / z) + to) / 4)] as const
  let p = 1
  const [low, high] = range(1, -1)
  for (let k = low; k <= high; k += 1) p -= at(4 * k + 1) - at(4 * k - 1)
  const [low3, high3] = range(-3, -1)
  for (let k = low3; k <= high3; k += 1) p += at(4 * k + 3) - at(4 * k + 1)
  return p
}

function ones(bits: Bits, from: number, to: number): number {
  let sum = 0
  for (let i = from; i < to; i += 1) sum += bits[i] as number
  return sum
}

/** How often each pattern of m bits stands in the bits, overlapping and round the end. */
function patterns(bits: Bits, m: number): Float64Array {
  const counts = new Float64Array(2 ** m)
  const mask = 2 ** m - 1
  let pattern = 0
  for (let i = 0; i < bits.length + m - 1; i += 1) {
    pattern = ((pattern << 1) | (bits[i % bits.length] as number)) & mask
    if (i >= m - 1) counts[pattern] = (counts[pattern] as number) + 1
  }
  return counts
}

/** ψ² of section 2.11; 0 for no bits. */
function patternExcess(bits: Bits, m: number): number {
  if (m <= 0) return 0
  let sum = 0
  for (const count of patterns(bits, m)) sum += count * count
  return (2 ** m / bits.length) * sum - bits.length
}
