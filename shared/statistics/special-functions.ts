const TINY = 1e-300
const CLOSE = 1e-16
const MOST_STEPS = 10_000

/** Lanczos's approximation (1964) with g = 7 and 9 coefficients as widely printed, from memory; about 1e-15. */
const LANCZOS = [
  0.999_999_999_999_809_93, 676.520_368_121_885_1, -1259.139_216_722_402_8, 771.323_428_777_653_13,
  -176.615_029_162_140_59, 12.507_343_278_686_905, -0.138_571_095_265_720_12, 9.984_369_578_019_571_6e-6,
  1.505_632_735_149_311_6e-7,
]

/** log Γ(x). Requires x > 0. */
export function logGamma(x: number): number {
  if (x < 0.5) return Math.log(Math.PI / Math.sin(Math.PI * x)) - logGamma(1 - x)
  const z = x - 1
  let sum = LANCZOS[0] as number
  for (let i = 1; i < LANCZOS.length; i += 1) sum += (LANCZOS[i] as number) / (z + i)
  const t = z + 7.5
  return 0.5 * Math.log(2 * Math.PI) + (z + 0.5) * Math.log(t) - t + Math.log(sum)
}

/**
 * The regularised upper incomplete gamma function Q(a, x): igamc of NIST SP 800-22 section 5.5.3. By its series below
 * x = a + 1 and by a continued fraction (modified Lentz) above (NIST DLMF 8.11.4 and 8.9.2, from memory).
 * Requires a > 0, x >= 0.
 */
export function upperGamma(a: number, x: number): number {
  if (x === 0) return 1
  const scale = Math.exp(a * Math.log(x) - x - logGamma(a))
  if (x < a + 1) {
    let [term, sum] = [1 / a, 1 / a]
    for (let n = 1; n < MOST_STEPS; n += 1) {
      term *= x / (a + n)
      sum += term
      if (term < sum * CLOSE) break
    }
    return 1 - sum * scale
  }
  let b = x + 1 - a
  let [c, d] = [1 / TINY, 1 / b]
  let fraction = d
  for (let n = 1; n < MOST_STEPS; n += 1) {
    const an = -n * (n - a)
    b += 2
    d = 1 / away(an * d + b)
    c = away(b + an / c)
    fraction *= c * d
    if (Math.abs(c * d - 1) < CLOSE) break
  }
  return fraction * scale
}

/** The complementary error function, by Q(1/2, x²). */
export function erfc(x: number): number {
  return x >= 0 ? upperGamma(0.5, x * x) : 2 - upperGamma(0.5, x * x)
}

/** The standard normal distribution function. */
export const normal = (x: number): number => erfc(-x / Math.SQRT2) / 2

/**
 * The regularised incomplete beta function, by its continued fraction (NIST DLMF 8.17.22, from memory).
 * Requires a, b > 0 and 0 <= x <= 1.
 */
export function incompleteBeta(a: number, b: number, x: number): number {
  if (x <= 0 || x >= 1) return x <= 0 ? 0 : 1
  if (x > (a + 1) / (a + b + 2)) return 1 - incompleteBeta(b, a, 1 - x)
  const front = Math.exp(logGamma(a + b) - logGamma(a) - logGamma(b) + a * Math.log(x) + b * Math.log1p(-x)) / a
  let c = 1
  let d = 1 / away(1 - ((a + b) * x) / (a + 1))
  let fraction = d
  for (let m = 1; m < MOST_STEPS; m += 1) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m))
    d = 1 / away(1 + even * d)
    c = away(1 + even / c)
    fraction *= c * d
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1))
    d = 1 / away(1 + odd * d)
    c = away(1 + odd / c)
    fraction *= c * d
    if (Math.abs(c * d - 1) < CLOSE) break
  }
  return front * fraction
}

const away = (value: number) => (Math.abs(value) < TINY ? TINY : value)
