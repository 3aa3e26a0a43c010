import { erfc, incompleteBeta, upperGamma } from './special-functions.ts'

/** The chance that a chi-square value is as large or larger. Requires degrees >= 1. */
export const chiSquareTail = (value: number, degrees: number): number => upperGamma(degrees / 2, value / 2)

/** The chance that a standard normal value lies as far or farther from 0, on either side. */
export const normalTwoSided = (z: number): number => erfc(Math.abs(z) / Math.SQRT2)

/** As {@link normalTwoSided}, for Student's t. */
export const studentTwoSided = (t: number, degrees: number): number =>
  incompleteBeta(degrees / 2, 0.5, degrees / (degrees + t * t))

/** Pearson's chi-square of counts against the counts expected, with one degree of freedom less than cells. */
export function chiSquare(counts: ArrayLike<number>, expected: ArrayLike<number>): { value: number; p: number } {
  if (counts.length !== expected.length || counts.length < 2) throw new RangeError('a count for each expected one')
  let value = 0
  for (let i = 0; i < counts.length; i += 1) {
    const e = expected[i] as number
    value += ((counts[i] as number) - e) ** 2 / e
  }
  return { value, p: chiSquareTail(value, counts.length - 1) }
}
