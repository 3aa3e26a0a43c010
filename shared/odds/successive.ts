import { CountOfOthers } from './count-of-others.ts'
import type { TicketList } from './ticket-groups.ts'

/** Two successive estimates agree to this before the finer one is believed. */
const AGREE = 1e-10
/** What a node may add, relatively, and still be left out at the ends. */
const NEGLIGIBLE = 1e-16
/** As much of a density, which only has to integrate to 1 within {@link AGREE}. */
const UNSEEN = 1e-12
const MOST_HALVINGS = 8

/** Chances of a `one-prize-each` draw for a whole list. */
export interface SuccessiveChances {
  /** For each group of the list, in its order: the chance of one of its entrants. */
  readonly held: Float64Array
  /** The chance of one more entrant, who is not in the list, with so many tickets. */
  readonly joining: (tickets: number) => number
}

/**
 * The chance of being among the first `picks` when entrants are picked one after another, each time in proportion to
 * their tickets, and leave the list when picked: successive sampling (Rosén, "Asymptotic theory for successive
 * sampling with varying probabilities without replacement", Annals of Mathematical Statistics 43, 1972), for every
 * ticket count of a list at once, with a relative error below 1e-9 (about 1e-12 in all checks made).
 *
 * Method. Give every ticket an alarm clock that rings at an exponential time; entrant i rings with rate w_i. The order
 * of ringing is the order of the draw (the "exponential clocks" behind Rosén's sampling; also Efraimidis and Spirakis,
 * Information Processing Letters 97, 2006). So i is picked exactly when i rings before the K-th ring of the OTHERS, T:
 *
 *     chance = E[1 - exp(-w_i T)] = integral over t of (1 - exp(-w_i t)) f(t) dt,
 *
 * where f is the density of T. How many others have rung by t is Poisson-binomial; f(t) is a coefficient of its
 * generating function, taken as a Cauchy integral round a circle through the saddle point ({@link CountOfOthers}; Hong,
 * Computational Statistics and Data Analysis 59, 2013, does so on the unit circle). The outer integral is the trapezoidal
 * rule over log t, which converges exponentially for such integrands (Trefethen and Weideman, SIAM Review 56, 2014); the
 * step is halved until two estimates agree to 1e-10 and each f integrates to 1. All citations are from memory.
 * Wallenius's and Fisher's noncentral hypergeometric distributions (Chesson 1976, Fog 2008) count items of each colour in
 * such a sample; with one item a colour, Wallenius's is this draw.
 *
 * Cost: (distinct counts) x (about 40 nodes) x (10 to 30 points) complex steps, whatever the number of entrants and
 * nearly whatever the number of picks: milliseconds for a few dozen counts. The worst case is a list in which everybody
 * holds a count of their own: 15 to 30 seconds for 10^6 entrants (`npm run bench -- odds`). It yields often, so that a server can
 * run it between its requests.
 *
 * Requires picks >= 0 and a list of at least one entrant.
 */
export function* successiveChances(list: TicketList, picks: number): Generator<void, SuccessiveChances> {
  const { groups, entrants } = list
  const held = new Float64Array(groups.length)
  // Nobody is left out of a list that is drawn to its end.
  if (picks === 0) return { held, joining: () => 0 }
  if (picks >= entrants) held.fill(1)
  if (picks > entrants) return { held, joining: () => 1 }
  const count = new CountOfOthers(list, picks)
  const integrals = new Integrals(count, picks < entrants)
  yield* integrals.run()
  if (picks < entrants) held.set(integrals.chances)
  const { nodes } = integrals
  return {
    held,
    joining: (tickets) => {
      const rate = tickets / list.tickets
      let chance = 0
      for (const [time, weight] of nodes) chance -= Math.expm1(-rate * time) * weight
      return Math.min(1, chance)
    },
  }
}

/** The trapezoidal sums over log t, of all groups at once, halved until they agree. */
class Integrals {
  /** Time and weight of each node of the density of the K-th ring of the whole list. */
  readonly nodes: (readonly [time: number, weight: number])[] = []
  readonly chances: Float64Array
  private readonly masses: Float64Array
  private whole = 0
  private step: number
  private low = 0
  private high = 0
  private centre = 0

  constructor(
    private readonly count: CountOfOthers,
    /** Whether the chances of the list's own entrants are wanted; else only those of one more. */
    private readonly own: boolean,
  ) {
    const size = own ? count.size : 0
    this.chances = new Float64Array(size)
    this.masses = new Float64Array(size)
    // The K-th ring spreads over about 1/sqrt(K) in log t.
    this.step = Math.min(0.25, 0.85 / Math.sqrt(count.picks))
  }

  *run(): Generator<void, void> {
    yield* this.span()
    for (let halving = 0; halving < MOST_HALVINGS; halving += 1) {
      const before = this.chances.slice()
      const whole = this.whole
      yield* this.halve()
      if (!this.agrees(before, whole)) continue
      for (let g = 0; g < before.length; g += 1) this.chances[g] = Math.min(1, this.chances[g] as number)
      return
    }
    throw new Error('The odds of this list did not settle.')
  }

  /** From the middle outwards to both sides, until nothing is added to anybody's chance. */
  private *span(): Generator<void, void> {
    const { count } = this
    this.centre = Math.log(count.timeOf(count.picks - 0.5))
    // Without one of them the others may be much slower: their K-th ring is no later than the (K+1)-th of all.
    const last = Math.log(count.timeOf(Math.min(count.picks + 1, count.entrants - 0.5)))
    yield* this.add(0)
    for (let quiet = 0; quiet < 2; ) {
      this.high += 1
      const counted = yield* this.add(this.high)
      quiet = counted || this.centre + this.high * this.step < last ? 0 : quiet + 1
    }
    for (let quiet = 0; quiet < 2; ) {
      this.low -= 1
      const counted = yield* this.add(this.low)
      quiet = counted ? 0 : quiet + 1
    }
  }

  private *halve(): Generator<void, void> {
    for (let place = this.low; place < this.high; place += 1) yield* this.add(place + 0.5)
    this.step /= 2
    this.low *= 2
    this.high *= 2
    // Every node weighs half of what it did.
    this.whole /= 2
    for (const [index, [time, weight]] of this.nodes.entries()) this.nodes[index] = [time, weight / 2]
    for (let g = 0; g < this.chances.length; g += 1) {
      this.chances[g] = (this.chances[g] as number) / 2
      this.masses[g] = (this.masses[g] as number) / 2
    }
  }

  /** Adds the node at `place` steps from the middle; whether it mattered to anybody. */
  private *add(place: number): Generator<void, boolean> {
    const { count } = this
    const time = Math.exp(this.centre + place * this.step)
    yield* count.at(time, this.own)
    const weight = this.step * time
    const all = count.density * weight
    this.nodes.push([time, all])
    let matters = all > UNSEEN * this.whole
    this.whole += all
    for (let g = 0; g < this.chances.length; g += 1) {
      const mass = (count.densities[g] as number) * weight
      const chance = mass * (count.rung[g] as number)
      if (chance > NEGLIGIBLE * (this.chances[g] as number) || mass > UNSEEN * (this.masses[g] as number))
        matters = true
      this.masses[g] = (this.masses[g] as number) + mass
      this.chances[g] = (this.chances[g] as number) + chance
    }
    return matters
  }

  private agrees(before: Float64Array, whole: number): boolean {
    if (!close(this.whole, 1, AGREE) || !close(this.whole, whole, AGREE)) return false
    for (let g = 0; g < before.length; g += 1) {
      if (!close(this.masses[g] as number, 1, AGREE)) return false
      if (!close(this.chances[g] as number, before[g] as number, AGREE)) return false
    }
    return true
  }
}

const close = (a: number, b: number, most: number) => Math.abs(a - b) <= most * Math.abs(b)
