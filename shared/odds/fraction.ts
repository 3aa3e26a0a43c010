/** A chance as whole numbers, in lowest terms: `over`/`under`. */
export interface Fraction {
  readonly over: bigint
  readonly under: bigint
}

/** over/under in lowest terms. Requires under > 0. */
export function fractionOf(over: bigint | number, under: bigint | number): Fraction {
  const [a, b] = [BigInt(over), BigInt(under)]
  if (b <= 0n) throw new RangeError('a fraction needs a denominator above 0')
  const common = greatestCommonDivisor(a < 0n ? -a : a, b)
  return { over: a / common, under: b / common }
}

export const add = (a: Fraction, b: Fraction): Fraction =>
  fractionOf(a.over * b.under + b.over * a.under, a.under * b.under)
export const multiply = (a: Fraction, b: Fraction): Fraction => fractionOf(a.over * b.over, a.under * b.under)
/** 1 - a. */
export const complement = ({ over, under }: Fraction): Fraction => ({ over: under - over, under })

/** A fraction from 0 to 1 to `digits` significant digits, half up, as a decimal such as 0.245783955. */
export function decimalOf({ over, under }: Fraction, digits: number): string {
  if (over === 0n) return '0'
  // The least power of ten that brings the first digit before the point.
  let places = digits - 1
  while (over * 10n ** BigInt(places) < under * 10n ** BigInt(digits - 1)) places += 1
  let scaled = (2n * over * 10n ** BigInt(places) + under) / (2n * under)
  // Rounding up may have brought one digit more: 0.9999… became 1.000….
  if (scaled === 10n ** BigInt(digits)) {
    scaled /= 10n
    places -= 1
  }
  const text = scaled.toString().padStart(places + 1, '0')
  return places === 0 ? text : `${text.slice(0, -places)}.${text.slice(-places)}`
}

function greatestCommonDivisor(a: bigint, b: bigint): bigint {
  let [x, y] = [a, b]
  while (y !== 0n) [x, y] = [y, x % y]
  return x
}
