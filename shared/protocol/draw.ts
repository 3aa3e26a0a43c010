import type { Sha256 } from '../bytes/hashing.ts'
import { derivedFlips, tossedFlips } from '../sampling/flips.ts'
import { CountTree, type Walk, type WalkRule } from '../sampling/walk.ts'
import type { SealPrize } from './seal-types.ts'

/** What a pick wins: an item of a prize, items from 1, or a place among the reserves, from 1. */
export type Award = { readonly item: number; readonly prize: string } | { readonly reserve: number }

/** A pick of a draw: its number from 0, its award, and the walk that made it. */
export interface DrawPick extends Walk {
  readonly pick: number
  readonly award: Award
}

/** Where the flips come from: a key that gives each pick its own stream, or the fair bits tossed so far. */
export type DrawFlips =
  | { readonly kind: 'derived'; readonly drawKey: Uint8Array }
  | { readonly kind: 'tossed'; readonly bits: ArrayLike<number> }

/** A draw to be made. `tickets` are the sealed counts in leaf order. */
export interface DrawInput {
  readonly tickets: ArrayLike<number>
  readonly rule: WalkRule
  readonly prizes: readonly SealPrize[]
  readonly reserves: number
  readonly flips: DrawFlips
}

/** Picks that were made, and how it ended. */
export interface DrawOutcome {
  readonly picks: readonly DrawPick[]
  /**
   * `complete`: every award was drawn; `no-tickets`: the draw ended with fewer picks; `dry`: the tosses ran out before
   * pick number `picks.length` had reached its leaf.
   */
  readonly end: 'complete' | 'no-tickets' | 'dry'
  /** Flips that the finished picks took. */
  readonly flipsUsed: number
}

/** The awards in the order in which they are drawn (PROTOCOL section 7): each prize's items, then the reserves. */
export function planAwards(prizes: readonly SealPrize[], reserves: number): readonly Award[] {
  const awards: Award[] = []
  for (const { id, quantity } of prizes) {
    for (let item = 1; item <= quantity; item += 1) awards.push({ item, prize: id })
  }
  for (let reserve = 1; reserve <= reserves; reserve += 1) awards.push({ reserve })
  return awards
}

/** Whether two awards are the same. */
export function sameAward(left: Award, right: Award): boolean {
  if ('reserve' in left || 'reserve' in right) {
    return 'reserve' in left && 'reserve' in right && left.reserve === right.reserve
  }
  return left.item === right.item && left.prize === right.prize
}

/**
 * Makes the picks of a draw one by one (PROTOCOL sections 5 and 7), so that a check need not hold them all. Returns
 * how it ended. A `tossed` draw that runs dry has changed nothing for the unfinished pick: run it again with the bits
 * of one round more and it comes to the same flip.
 */
export function* drawPicks(
  sha256: Sha256,
  input: DrawInput,
): Generator<DrawPick, { readonly end: DrawOutcome['end']; readonly flipsUsed: number }> {
  const tree = new CountTree(input.tickets)
  const { flips } = input
  const tossed = flips.kind === 'tossed' ? tossedFlips(flips.bits) : null
  let flipsUsed = 0
  for (const [pick, award] of planAwards(input.prizes, input.reserves).entries()) {
    if (tree.remaining === 0) return { end: 'no-tickets', flipsUsed }
    const stream = flips.kind === 'derived' ? derivedFlips(sha256, flips.drawKey, pick) : tossed
    const walk = stream === null ? null : tree.walk(stream)
    if (walk === null) return { end: 'dry', flipsUsed }
    for (const coin of walk.coins) flipsUsed += coin[2].length
    yield { pick, award, ...walk }
    tree.remove(walk.leaf, input.rule)
  }
  return { end: 'complete', flipsUsed }
}

/** Makes all picks of a draw (PROTOCOL section 7). */
export function runDraw(sha256: Sha256, input: DrawInput): DrawOutcome {
  const picks: DrawPick[] = []
  const run = drawPicks(sha256, input)
  for (let step = run.next(); ; step = run.next()) {
    if (step.done === true) return { picks, ...step.value }
    picks.push(step.value)
  }
}
