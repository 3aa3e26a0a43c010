import { levelSizes, type Side } from '../merkle/tree-shape.ts'
import type { WalkCoin, WalkRule } from './walk.ts'

/**
 * One entrant's branch of a walk: which of its coins kept them in, where it turned away from them, and where their
 * tickets stand in each coin's bar. Everything follows from the sealed list's shape, the entrant's receipt and the picks
 * before; nothing of anybody else's is needed.
 */

/** One coin of a walk as one entrant sees it. All counts are tickets still in. */
export interface BranchCoin {
  /** The entrant's tickets, and all tickets under this coin: their chance here is `mine` in `total`. */
  readonly mine: number
  readonly total: number
  /** Tickets that stand before theirs, from the left end of the coin's bar. */
  readonly before: number
  /** Whether the coin went to their side: they were still in behind it. */
  readonly kept: boolean
}

/** A real node on the way from the root to a leaf: where it splits, and the side that the leaf is on. */
interface Fork {
  readonly from: number
  readonly split: number
  readonly to: number
  readonly side: Side
}

/** The forks from the root to a leaf: one for each coin of a walk that ends there. Requires 0 ≤ leaf < size. */
export function forksTo(leaf: number, size: number): readonly Fork[] {
  if (!Number.isSafeInteger(leaf) || leaf < 0 || leaf >= size) throw new RangeError(`no leaf ${leaf} of ${size}`)
  const forks: Fork[] = []
  const sizes = levelSizes(size)
  for (let level = sizes.length - 1; level > 0; level -= 1) {
    const width = 2 ** level
    const at = Math.floor(leaf / width)
    const split = at * width + width / 2
    // A last node that was carried up is the same node on both levels: nothing forks there.
    if (split >= size) continue
    const to = Math.min(size, (at + 1) * width)
    forks.push({ from: at * width, split, to, side: leaf < split ? 'L' : 'R' })
  }
  return forks
}

/** How far a walk to leaf `picked` came with leaf `own`. `turnedAt` counts coins from 1; null where it came to `own`. */
export function turnedAway(
  own: number,
  picked: number,
  size: number,
): { readonly coins: number; readonly turnedAt: number | null } {
  const ours = forksTo(own, size)
  const theirs = forksTo(picked, size)
  const index = theirs.findIndex((fork, i) => fork.side !== ours[i]?.side)
  return { coins: theirs.length, turnedAt: index === -1 ? null : index + 1 }
}

/** What of one entrant is known: from their receipt. */
export interface OwnLeaf {
  readonly leaf: number
  /** Leaves of the sealed list. */
  readonly size: number
  /** Their tickets still in at this pick. */
  readonly ticketsIn: number
  /** Siblings from the leaf up, as in the receipt: sides and sealed tickets. */
  readonly path: readonly { readonly side: Side; readonly tickets: number }[]
}

/**
 * The coins of a walk up to the one that turned away, or all of them where the walk came to the entrant.
 * `removedBetween(from, to)` tells how many tickets of the leaves from `from` up to but not including `to` earlier picks
 * had taken out. Throws a RangeError where coins, path and size do not belong together.
 */
export function branchOf(
  own: OwnLeaf,
  coins: readonly WalkCoin[],
  removedBetween: (from: number, to: number) => number,
): readonly BranchCoin[] {
  const forks = forksTo(own.leaf, own.size)
  if (forks.length !== own.path.length) throw new RangeError('the path does not belong to this leaf')
  const branch: BranchCoin[] = []
  // Sealed tickets before theirs under each fork: all siblings on the left from there down.
  for (const [index, fork] of forks.entries()) {
    const coin = coins[index]
    if (!coin) break
    const below = own.path.slice(0, own.path.length - index)
    const sealedBefore = below.reduce((sum, step) => sum + (step.side === 'L' ? step.tickets : 0), 0)
    const kept = (coin[3] === 'H') === (fork.side === 'L')
    const before = sealedBefore - removedBetween(fork.from, own.leaf)
    branch.push({ mine: own.ticketsIn, total: coin[0] + coin[1], before, kept })
    if (!kept) break
  }
  return branch
}

/** An entrant's tickets still in before a pick, out of how often earlier picks came to them. */
export function ticketsStillIn(rule: WalkRule, sealed: number, earlierPicks: number): number {
  if (rule === 'every-ticket') return Math.max(0, sealed - earlierPicks)
  return earlierPicks > 0 ? 0 : sealed
}
