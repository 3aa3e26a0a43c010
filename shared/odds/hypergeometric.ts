import { gaussLegendre } from './quadrature.ts'

/** From so many factors on, their sum is taken as an integral. */
const MANY = 1000

/**
 * The chance that at least one of `tickets` of `total` tickets is among `picks` drawn without replacement: what an
 * `every-ticket` draw gives an entrant. 1 - C(total - tickets, picks) / C(total, picks), the hypergeometric chance
 * (textbook; Johnson, Kotz and Kemp, "Univariate Discrete Distributions", chapter 6, cited from memory), to a relative
 * error of about 1e-13.
 *
 * The logarithm of the quotient is the sum of log(1 - m/(total - j)) for j from 0 to l - 1, with l the lesser of tickets
 * and picks and m the other: no term loses digits, and neither does 1 - e^sum. Beyond {@link MANY} terms the sum is taken
 * by the Euler-Maclaurin formula in its midpoint form (NIST Handbook of Mathematical Functions, section 2.10(i), from
 * memory), whose next term is then far below what a double can hold. Costs at most 1000 logarithms.
 */
export function atLeastOne(total: number, tickets: number, picks: number): number {
  if (tickets === 0 || picks === 0) return 0
  if (picks > total - tickets) return 1
  const [few, many] = picks < tickets ? [picks, tickets] : [tickets, picks]
  const term = (j: number) => Math.log1p(-many / (total - j))
  let sum = 0
  if (few <= MANY) {
    for (let j = 0; j < few; j += 1) sum += term(j)
  } else if (few >= (total - many) / 2) {
    // Each of more than a thousand tickets is missed with a chance of a half at most: below 2^-1000 together.
    return 1
  } else {
    const slope = (j: number) => -many / ((total - j) * (total - j - many))
    sum = gaussLegendre(term, -0.5, few - 0.5) - (slope(few - 0.5) - slope(-0.5)) / 24
  }
  return -Math.expm1(sum)
}
