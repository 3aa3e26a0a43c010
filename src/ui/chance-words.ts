import { formatNumber } from './format-number.ts'

/**
 * A chance of a in b in plain words, without the exact figure: "1 in 154", "about 1 in 13", "about 1 in 1.8",
 * "nearly certain" where that would round to 1 in 1, "certain". Requires 0 <= a <= b, b > 0. Reckoned in whole numbers, so that large counts round rightly.
 */
export function oneIn(a: number, b: number): string {
  if (a === 0) return 'none'
  if (a === b) return 'certain'
  const [over, under] = [BigInt(a), BigInt(b)]
  if (under * 20n < over * 21n) return 'nearly certain'
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

/** A chance as the API gives it: a decimal to nine digits and, where it is short, the exact fraction. */
export interface ChanceFigures {
  readonly decimal: string
  readonly exact: { readonly over: number; readonly under: number } | null
}

/** As {@link oneIn}, for a chance given as a decimal. */
export function oneInChance({ decimal, exact }: ChanceFigures): string {
  if (exact) return oneIn(exact.over, exact.under)
  const chance = Number(decimal)
  if (chance === 0) return 'none'
  if (chance === 1) return 'certain'
  const odds = 1 / chance
  // 1 in 1.04 and below would be rounded to 1 in 1: it is still no certainty.
  if (odds < 1.05) return 'nearly certain'
  if (odds < 3.95) return `about 1 in ${odds.toFixed(1).replace(/\.0$/, '')}`
  return `about 1 in ${formatNumber(Math.round(odds))}`
}

/** A chance in per cent to three digits: 6.34 %, 0.0119 %; never rounded up to the whole. */
export function perCent(chance: number): string {
  if (chance === 0 || chance === 1) return `${chance * 100}\u00a0%`
  if (chance >= 0.9995) return 'over 99.9\u00a0%'
  if (chance < 0.000_000_1) return 'under 0.00001\u00a0%'
  const value = chance * 100
  // As many places as three digits need: toPrecision would turn to exponents.
  const places = Math.max(0, 2 - Math.floor(Math.log10(value)))
  return `${value.toFixed(places)}\u00a0%`
}
