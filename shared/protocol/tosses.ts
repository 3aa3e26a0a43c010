import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { parseTosses, peres } from '../sampling/extractors.ts'
import type { TossPlan } from './seal-types.ts'

/** Rounds of tosses and their fair bits (PROTOCOL sections 3 and 4). */

/** Why the rounds of a draw are refused. */
export type TossesCode = 'round-length' | 'toss-letter' | 'too-few-bits' | 'too-many-rounds'

/** The fair bits of rounds written as `H` and `T`: ψ of each round, joined in order. Throws for other letters. */
export function tossBits(rounds: readonly string[]): readonly number[] {
  return rounds.flatMap((round) => peres(parseTosses(round)))
}

/**
 * Whether another round must be tossed: the fair bits so far are fewer than the minimum, or, in a `tossed` draw, the
 * walks have run dry. Rounds stop as soon as this is false.
 */
export function needsAnotherRound(plan: TossPlan, rounds: readonly string[], walksRanDry: boolean): boolean {
  return walksRanDry || tossBits(rounds).length < plan.minimumBits
}

/**
 * Checks rounds against what was sealed (sections 3 and 4): each has exactly its length in H and T; their bits are at
 * least `minimumBits`, and `walkFlips` where the walks read the bits themselves; and without the last round they would
 * not have been. `walkFlips` is what all walks take, or null in a `derived` draw. Returns the bits.
 */
export function checkTosses(
  plan: TossPlan,
  rounds: readonly string[],
  walkFlips: number | null,
): Result<readonly number[], Failure<TossesCode>> {
  for (const [i, round] of rounds.entries()) {
    const at = `tosses[${i}]`
    if (!/^[HT]*$/.test(round)) return fail('toss-letter', at, 'Tosses are written as H and T.')
    if (round.length !== plan.roundLength) {
      return fail('round-length', at, `A round has exactly ${plan.roundLength} tosses, this one ${round.length}.`)
    }
  }
  const needed = Math.max(plan.minimumBits, walkFlips ?? 0)
  const bits = tossBits(rounds)
  if (bits.length < needed) {
    return fail('too-few-bits', 'tosses', `The rounds give ${bits.length} fair bits of the ${needed} needed.`)
  }
  if (tossBits(rounds.slice(0, -1)).length >= needed) {
    return fail('too-many-rounds', `tosses[${rounds.length - 1}]`, 'This round was not needed and must not be there.')
  }
  return ok(bits)
}
