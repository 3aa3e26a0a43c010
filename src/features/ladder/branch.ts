import { coinShape, trim, type LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { capitalise, countOf, formatNumber, numberWord, ordinal } from '#src/ui/format-number.ts'

/** One entrant's place in a coin: their tickets, all tickets, those before theirs, and whether the coin kept them in. */
export interface BranchPlace {
  readonly mine: number
  readonly total: number
  readonly before: number
  readonly kept: boolean
}

export interface Strip {
  /** From the left end of the bar, and the width, in per cent of it. */
  readonly x: number
  readonly width: number
}

/** Where their tickets stand in a coin's bar. */
export function branchStrip({ mine, total, before }: BranchPlace): Strip {
  return { x: (before / total) * 100, width: (mine / total) * 100 }
}

/**
 * Their tickets opening out to the next row with the chosen side, in the fan's own units; null where the coin went the
 * other way, so that nothing of theirs goes on.
 */
export function branchBand(coin: LadderCoin, place: BranchPlace, width: number, height = 100): string | null {
  if (!place.kept || place.mine === 0) return null
  const shape = coinShape(coin)
  const unit = width / shape.total
  const top = (ticket: number) => trim(ticket * unit)
  const foot = (ticket: number) => trim(((ticket - shape.start) * width) / shape.chosen)
  const from = place.before
  const to = place.before + place.mine
  return `M${top(from)} 0L${top(to)} 0L${foot(to)} ${height}L${foot(from)} ${height}Z`
}

/** What a coin meant for them. */
export const keptWords = ({ kept }: BranchPlace): string => (kept ? 'you were still in' : 'the walk turned away')

/**
 * Their branch in sentences: how their share grew with every coin, and where the walk turned away. Shares beyond the
 * sixth are left out in the middle; the ladder shows them all.
 */
export function branchWords(branch: readonly BranchPlace[], coins: readonly LadderCoin[]): string {
  const first = branch[0]
  const last = branch.at(-1)
  if (!first || !last) return 'You were the only entrant left, so no coin was needed.'
  const mine = formatNumber(first.mine)
  const turned = last.kept ? null : turnWords(branch.length, coins[branch.length - 1])
  if (branch.length === 1) return turned ?? 'The one coin came your way.'
  const totals = branch.map(({ total }) => formatNumber(total))
  const shown = totals.length > 7 ? [...totals.slice(0, 4), '…', ...totals.slice(-2)] : totals
  const middle = shown.slice(1, -1).map((total) => (total === '…' ? '…' : `of ${total}`))
  const row = [`${mine} of ${shown[0]}`, ...(middle.length > 0 ? [`then ${middle[0]}`, ...middle.slice(1)] : [])]
  return `Your share grew with every coin that came your way: ${row.join(', ')} and of ${shown.at(-1)}. ${turned ?? KEPT_ALL}`
}

const KEPT_ALL = 'Every coin came your way, to the last.'

function turnWords(number: number, coin: LadderCoin | undefined): string {
  const went = coin?.[3] === 'H' ? 'left' : 'right'
  return `At the ${ordinal(number)} coin the walk went ${went}, and you stood on the ${went === 'left' ? 'right' : 'left'}.`
}

/** "Four coins of five kept you in, and the fifth turned away." */
export function nearness(pick: { readonly coins: number; readonly turnedAt: number | null }): string {
  const { coins, turnedAt } = pick
  if (turnedAt === null)
    return coins === 0 ? 'no coin was needed' : `all ${countOf(coins, 'coin', 'coins', true)} came your way`
  if (turnedAt === 1) return 'the first coin turned away'
  const kept = countOf(turnedAt - 1, 'coin', 'coins', true)
  return `${kept} of ${numberWord(coins)} kept you in, and the ${ordinal(turnedAt)} turned away`
}

/** The same as a sentence of its own. */
export const nearnessSentence = (pick: Parameters<typeof nearness>[0]): string => `${capitalise(nearness(pick))}.`
