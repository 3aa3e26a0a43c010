import type { TicketList } from './ticket-groups.ts'

/** Terms this much smaller than the first are left out of the Cauchy sum. */
const FAINT = Math.log(1e-19)
/** A clock that is due this many times over has surely rung: e^-46 is 1e-20. */
const SURE = 46

/** Where the Cauchy sum of one time is taken. */
interface Circle {
  /** k = K - 1. */
  readonly index: number
  /** M; 1 for the centre itself. */
  readonly points: number
  /** log r^-k. */
  readonly log: number
  /** Whether the K-th ring has surely passed: only without one of those who have surely rung it may be to come. */
  readonly passed: boolean
}

/**
 * The K-th ring of exponential clocks (see successive.ts): its density at one time after another, for the whole list and
 * for the list without one entrant of each group. Times are in units in which all tickets together ring once.
 *
 * By time t an entrant has rung with chance q = 1 - e^(-wt), p = 1 - q. The number that has rung has the generating
 * function P(z) = product of (p + q z), and the density of the K-th ring is the coefficient of z^k, k = K - 1, in
 * P(z) S(z), S(z) = sum of w p / (p + q z). On the circle |z| = r of the saddle point, where the tilted chances
 * rho = q r / (p + q r) add up to k (and a half, see below), the integrand is a bell of width 1/sigma about z = r, and the trapezoidal rule with
 * M points (half a step off the real axis) errs only by coefficients M and more above the k-th. Without entrant i both
 * P and S lose one term: a division by 1 + rho_i (e^(i theta) - 1), which has no small divisors where P is not small.
 */
export class CountOfOthers {
  readonly size: number
  readonly entrants: number
  /** Of each group: its density without one of its entrants, and the chance of one to have rung. */
  readonly densities: Float64Array
  readonly rung: Float64Array
  /** The density of the whole list. */
  density = 0

  private readonly rates: Float64Array
  private readonly counts: Float64Array
  /** q/p, rho, 1 - rho and log(p + q r) of each group. */
  private readonly odds: Float64Array
  private readonly rho: Float64Array
  private readonly rest: Float64Array
  private readonly logs: Float64Array
  private tilt = 0

  /** Requires 1 <= picks <= entrants. */
  constructor(
    list: TicketList,
    readonly picks: number,
  ) {
    const size = list.groups.length
    this.size = size
    this.entrants = list.entrants
    this.rates = Float64Array.from(list.groups, ({ tickets }) => tickets / list.tickets)
    this.counts = Float64Array.from(list.groups, ({ entrants }) => entrants)
    this.densities = new Float64Array(size)
    this.rung = new Float64Array(size)
    this.odds = new Float64Array(size)
    this.rho = new Float64Array(size)
    this.rest = new Float64Array(size)
    this.logs = new Float64Array(size)
  }

  /** The time by which `rings` entrants are expected to have rung. Requires 0 < rings < entrants. */
  timeOf(rings: number): number {
    const { rates, counts } = this
    const expected = (time: number) => {
      let sum = 0
      for (let g = 0; g < this.size; g += 1) sum -= (counts[g] as number) * Math.expm1(-(rates[g] as number) * time)
      return sum
    }
    let [low, high] = [rings, rings]
    while (expected(high) < rings) high *= 2
    while (expected(low) > rings) low /= 2
    // To a hundredth: it only says where to begin.
    while (high / low > 1.01) {
      const middle = Math.sqrt(low * high)
      if (expected(middle) < rings) low = middle
      else high = middle
    }
    return Math.sqrt(low * high)
  }

  /** Sets the densities at a time; those of the groups only where `each`. */
  *at(time: number, each: boolean): Generator<void, void> {
    const { logs, size, counts, odds } = this
    const circle = this.findCircle(time)
    this.density = 0
    if (each) this.densities.fill(0)
    if (circle === null) return
    const { index, points, passed } = circle
    let scale = circle.log
    for (let g = 0; g < size; g += 1) scale += (counts[g] as number) * (logs[g] as number)
    for (let point = 0; point < Math.max(1, points / 2); point += 1) {
      const angle = points === 1 ? 0 : ((point + 0.5) * 2 * Math.PI) / points
      const faint = this.addPoint(angle, index, each)
      yield
      if (faint) break
    }
    const share = points === 1 ? 1 : 2 / points
    this.density *= passed ? 0 : share * Math.exp(scale)
    if (!each) return
    for (let g = 0; g < size; g += 1) {
      const passedWithout = passed && odds[g] !== Number.POSITIVE_INFINITY
      this.densities[g] = passedWithout
        ? 0
        : (this.densities[g] as number) * share * Math.exp(scale - (logs[g] as number))
    }
  }

  /**
   * Finds the circle for a time: sets rung, rho, 1 - rho and log(p + q r) of each group. Null where the density is 0 for
   * everybody, because more than K, or all, have surely rung.
   */
  private findCircle(time: number): Circle | null {
    const { rates, counts, odds, logs, rung, size } = this
    const index = this.picks - 1
    let sure = 0
    for (let g = 0; g < size; g += 1) {
      const x = (rates[g] as number) * time
      if (x > SURE) sure += counts[g] as number
      rung[g] = x > SURE ? 1 : -Math.expm1(-x)
      odds[g] = x > SURE ? Number.POSITIVE_INFINITY : Math.expm1(x)
    }
    if (index - sure < -1 || sure === this.entrants) return null
    if (index === 0 && sure === 0) {
      // The circle shrinks to its centre, where one point is the whole sum.
      this.rho.fill(0)
      this.rest.fill(1)
      for (let g = 0; g < size; g += 1) logs[g] = -(rates[g] as number) * time
      return { index, points: 1, log: 0, passed: false }
    }
    // Without one who has surely, or nearly, rung the others' index is higher by one: a circle halfway serves both.
    const deviation = this.findTilt(Math.max(0, index - sure) + 0.5, sure)
    const [r, more] = [Math.exp(this.tilt), Math.expm1(this.tilt)]
    for (let g = 0; g < size; g += 1) {
      const q = rung[g] as number
      if (odds[g] === Number.POSITIVE_INFINITY) logs[g] = this.tilt
      else if (q * more > -0.5) logs[g] = Math.log1p(q * more)
      else logs[g] = Math.log(Math.exp(-(rates[g] as number) * time) + q * r)
    }
    const points = 2 * Math.ceil(5 * deviation + 12)
    return { index, points, log: -index * this.tilt, passed: sure > index }
  }

  /** Adds one point of the circle to all sums; whether it, and so all behind it, are too faint to matter. */
  private addPoint(angle: number, index: number, each: boolean): boolean {
    const { rates, counts, rho, rest, size } = this
    const [c1, sine] = [2 * Math.sin(angle / 2) ** 2, Math.sin(angle)]
    // P / P(r) e^(-i index angle) as (re + i im) e^(log + i phase), and S.
    let [re, im, log, phase, least] = [1, 0, 0, -index * angle, 1]
    let [sRe, sIm] = [0, 0]
    for (let g = 0; g < size; g += 1) {
      const n = counts[g] as number
      const p = rho[g] as number
      const q = rest[g] as number
      const a = 1 - p * c1
      const b = p * sine
      const square = 1 - 2 * p * q * c1
      if (n === 1) {
        const swap = re * a - im * b
        im = re * b + im * a
        re = swap
        if (re * re + im * im < 1e-200) {
          log -= 100 * Math.LN10
          re *= 1e100
          im *= 1e100
        }
      } else {
        log += n * 0.5 * Math.log1p(-2 * p * q * c1)
        phase += n * Math.atan2(b, a)
      }
      if (square < least) least = square
      const v = (n * (rates[g] as number) * q) / square
      sRe += v * a
      sIm -= v * b
    }
    const magnitude = Math.exp(log)
    const [cosine, sinus] = [Math.cos(phase), Math.sin(phase)]
    const pRe = magnitude * (re * cosine - im * sinus)
    const pIm = magnitude * (re * sinus + im * cosine)
    this.density += pRe * sRe - pIm * sIm
    if (each) this.addEach(pRe, pIm, sRe, sIm, c1, sine)
    // Two terms may be lost to the divisions; beyond them P only falls with the angle.
    return 0.5 * Math.log(re * re + im * im) + log - Math.log(least) < FAINT
  }

  /** Adds one point of the circle to each group's sum: Re[P (S - v/D) / D] with D = 1 + rho (e^(i angle) - 1). */
  private addEach(gRe: number, gIm: number, sumRe: number, sumIm: number, c1: number, sine: number): void {
    const { rates, rho, rest, densities, size } = this
    for (let g = 0; g < size; g += 1) {
      const p = rho[g] as number
      const q = rest[g] as number
      const square = 1 - 2 * p * q * c1
      const eRe = (1 - p * c1) / square
      const eIm = -(p * sine) / square
      const v = (rates[g] as number) * q
      const sRe = sumRe - v * eRe
      const sIm = sumIm - v * eIm
      const tRe = sRe * eRe - sIm * eIm
      const tIm = sRe * eIm + sIm * eRe
      densities[g] = (densities[g] as number) + gRe * tRe - gIm * tIm
    }
  }

  /**
   * Sets rho, so that it adds up to `target` over those who have not surely rung (nearly: any circle will do), and log r;
   * returns the standard deviation of the tilted count.
   */
  private findTilt(target: number, sure: number): number {
    let [low, high] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY]
    for (let turn = 0; ; turn += 1) {
      const [mean, variance] = this.tiltBy(this.tilt)
      const off = mean - sure - target
      if (Math.abs(off) <= 0.01 * Math.sqrt(variance) || turn === 200) return Math.sqrt(variance)
      if (off > 0) high = this.tilt
      else low = this.tilt
      const newton = this.tilt - Math.max(-4, Math.min(4, off / variance))
      this.tilt = newton > low && newton < high ? newton : (low + high) / 2
    }
  }

  private tiltBy(tilt: number): [mean: number, variance: number] {
    const { counts, odds, rho, rest } = this
    const r = Math.exp(tilt)
    let [mean, variance] = [0, 0]
    for (let g = 0; g < this.size; g += 1) {
      const x = r * (odds[g] as number)
      const q = 1 / (1 + x)
      const p = q === 0 ? 1 : x * q
      rho[g] = p
      rest[g] = q
      mean += (counts[g] as number) * p
      variance += (counts[g] as number) * p * q
    }
    return [mean, variance]
  }
}
