/** The first `count` binary digits of π, e, √2 and √3, from the first 1 on: the test data of NIST SP 800-22. */
export function constantBits(name: 'pi' | 'e' | 'sqrt2' | 'sqrt3', count: number): string {
  // Some digits more than wanted, so that what is cut off does not reach them.
  const places = BigInt(count + 64)
  const scaled =
    name === 'pi' ? pi(places) : name === 'e' ? e(places) : squareRoot((name === 'sqrt2' ? 2n : 3n) << (2n * places))
  return scaled.toString(2).slice(0, count)
}

/** The whole part of a square root, by Newton's steps with the precision doubling. */
function squareRoot(value: bigint): bigint {
  if (value < 1n << 52n) return BigInt(Math.floor(Math.sqrt(Number(value))))
  const bits = BigInt(value.toString(16).length * 4)
  const cut = bits >> 2n
  const guess = squareRoot(value >> (2n * cut)) << cut
  // Twice: the first step doubles the digits, the second mends the last ones.
  const better = (guess + value / guess) >> 1n
  return (better + value / better) >> 1n
}

/** The sum of 1/k!, by binary splitting. */
function e(places: bigint): bigint {
  const split = (a: number, b: number): [bigint, bigint] => {
    if (b - a === 1) return [1n, BigInt(b)]
    const middle = (a + b) >> 1
    const [p1, q1] = split(a, middle)
    const [p2, q2] = split(middle, b)
    return [p1 * q2 + p2, q1 * q2]
  }
  // 1/k! falls below 2^-places well before k = places / 8.
  const [p, q] = split(0, Math.max(60, Number(places >> 3n)))
  return (1n << places) + (p << places) / q
}

/** Chudnovsky's series, by binary splitting. */
function pi(places: bigint): bigint {
  const split = (a: bigint, b: bigint): [bigint, bigint, bigint] => {
    if (b - a === 1n) {
      if (a === 0n) return [1n, 1n, 13591409n]
      const p = (6n * a - 5n) * (2n * a - 1n) * (6n * a - 1n)
      const q = a * a * a * 10939058860032000n
      const t = p * (13591409n + 545140134n * a)
      return [p, q, a % 2n === 1n ? -t : t]
    }
    const middle = (a + b) >> 1n
    const [p1, q1, t1] = split(a, middle)
    const [p2, q2, t2] = split(middle, b)
    return [p1 * p2, q1 * q2, q2 * t1 + p1 * t2]
  }
  const [, q, t] = split(0n, places / 47n + 2n)
  return (q * 426880n * squareRoot(10005n << (2n * places))) / t
}
