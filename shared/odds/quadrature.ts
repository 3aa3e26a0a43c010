/** Nodes and weights of the 20-point Gauss-Legendre rule on [-1, 1] (the positive half), found once by Newton steps. */
const RULE = legendreRule(20)

/**
 * The integral of a function that is smooth over [from, to], by the 20-point Gauss-Legendre rule: exact for polynomials
 * up to degree 39.
 */
export function gaussLegendre(f: (x: number) => number, from: number, to: number): number {
  const [centre, half] = [(from + to) / 2, (to - from) / 2]
  let sum = 0
  for (const [node, weight] of RULE) sum += weight * (f(centre - half * node) + f(centre + half * node))
  return half * sum
}

/** Requires an even number of points. */
function legendreRule(points: number): readonly (readonly [node: number, weight: number])[] {
  return Array.from({ length: points / 2 }, (_, i) => {
    let x = Math.cos((Math.PI * (i + 0.75)) / (points + 0.5))
    let slope = 0
    for (let step = 0; step < 100; step += 1) {
      // The three-term recurrence of the Legendre polynomials.
      let [previous, value] = [1, x]
      for (let n = 2; n <= points; n += 1)
        [previous, value] = [value, ((2 * n - 1) * x * value - (n - 1) * previous) / n]
      slope = (points * (x * value - previous)) / (x * x - 1)
      const change = value / slope
      x -= change
      if (Math.abs(change) < 1e-16) break
    }
    return [x, 2 / ((1 - x * x) * slope * slope)] as const
  })
}
