import { formatNumber } from './format-number.ts'

/**
 * A chance of a in b in plain words, without the exact figure: "1 in 154", "about 1 in 13", "about 1 in 1.8",
 * "certain". Requires 0 <= a <= b, b > 0. Reckoned in whole numbers, so that large counts round rightly.
 */
export function oneIn(a: number, b: number): string {
  if (a === 0) return 'none'
  if (a === b) return 'certain'
  const [over, under] = [BigInt(a), BigInt(b)]
  if (under % over === 0n) return `1 in ${formatNumber(under / over)}`
  // Below 1 in 4 a whole number would be too rough.
  if (under < 4n * over) {
    const tenths = (under * 20n + over) / (over * 2n)
    return `about 1 in ${formatNumber(tenths / 10n)}${tenths % 10n === 0n ? '' : `.${tenths % 10n}`}`
  }
  return `about 1 in ${formatNumber((under * 2n + over) / (over * 2n))}`
}

/** The exact figure: 12/154. */
export function fraction(a: number, b: number): string {
  return `${a}/${b}`
}
