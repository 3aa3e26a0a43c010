import type { EntryPick, EntryView } from '#shared/schemas/api/entry.ts'
import { nearness } from '#src/features/ladder/branch.ts'
import { awardInSentence } from '#src/lib/award-words.ts'
import { fraction, oneIn } from '#src/ui/chance-words.ts'
import { capitalise, countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'

const prizesOf = (entry: EntryView) => entry.result?.won.filter(({ award }) => award.kind === 'prize') ?? []
const reservesOf = (entry: EntryView) => entry.result?.won.filter(({ award }) => award.kind === 'reserve') ?? []

/** "the first prize", "the first prize and the third prize, 2 of 3". */
function listed(parts: readonly string[]): string {
  const last = parts.at(-1) ?? ''
  return parts.length < 2 ? last : `${parts.slice(0, -1).join('; ')} and ${last}`
}

/** The heading: the one thing that matters now. */
export function entryTitle(entry: EntryView): string {
  const { state } = entry.draw
  const tickets = countOf(entry.tickets, 'ticket')
  if (entry.result) {
    const prizes = prizesOf(entry)
    if (prizes.length > 0) return `Your tickets won ${listed(prizes.map(({ award }) => awardInSentence(award)))}`
    return entry.tickets === 1 ? 'Your ticket did not win a prize' : `None of your ${tickets} won a prize`
  }
  if (state === 'cancelled') return 'This draw was cancelled'
  if (state === 'failed') return 'This draw has failed'
  if (entry.sealed) return `${entry.tickets === 1 ? 'Your ticket is' : `Your ${tickets} are`} in the sealed list`
  return `You are entered with ${tickets}`
}

/** The first sentences, under the heading. */
export function entryLead(entry: EntryView, first: EntryPick | null): string {
  const { draw } = entry
  if (entry.result) return resultLead(entry, first)
  if (draw.state === 'cancelled') {
    return 'Nothing was drawn, and nothing will be. The promoter tells you what happens with what you paid.'
  }
  if (draw.state === 'failed') {
    return 'Nothing was drawn, and nobody has won. The promoter tells you what happens next.'
  }
  const at = formatMoment(draw.drawAt, draw.timeZone)
  const among = `${formatNumber(draw.tickets)} tickets of ${countOf(draw.entrants, 'entrant')}`
  const chance = `Your chance of the first prize is ${oneIn(entry.tickets, draw.tickets)} (${fraction(entry.tickets, draw.tickets)}).`
  const whose = entry.tickets === 1 ? 'It is' : 'They are'
  if (entry.sealed) return `${whose} among ${among}, and nobody can change that unseen. The draw is on ${at}. ${chance}`
  if (draw.state === 'closed') return `The list is closed and will be sealed in public. The draw is on ${at}.`
  return `The list is open until ${formatMoment(draw.closesAt, draw.timeZone)}. The draw is on ${at}.`
}

function resultLead(entry: EntryView, first: EntryPick | null): string {
  const reserves = reservesOf(entry)
  const reserve =
    reserves.length > 0
      ? ` You hold ${listed(reserves.map(({ award }) => awardInSentence(award)))}: if a prize passes to you, the promoter tells you.`
      : ''
  if (prizesOf(entry).length > 0) {
    return `The promoter, ${entry.draw.promoter.name}, will be in touch with you. Nobody who asks you for money to hand over a prize acts for the promoter.${reserve}`
  }
  const near = first && first.mine > 0 ? `For ${awardInSentence(first.award)}, ${nearness(first)}.` : ''
  return `${near}${reserve}`.trim()
}

/** What one pick was for this entrant, in a sentence. */
export function pickWords(pick: EntryPick): string {
  const award = awardInSentence(pick.award)
  if (pick.mine === 0) return `${capitalise(award)}: your tickets had left the draw, with what they had won before.`
  const chance = `${formatNumber(pick.mine)} of the ${countOf(pick.remaining, 'ticket')} then in ${pick.mine === 1 ? 'was' : 'were'} yours: ${oneIn(pick.mine, pick.remaining)} (${fraction(pick.mine, pick.remaining)}).`
  return chance
}

/** "coin 5 of 5"; "yours" where the walk came to them; "no longer in". */
export function reachedWords(pick: EntryPick): string {
  if (pick.mine === 0) return 'no longer in'
  if (pick.turnedAt === null) return 'it came to you'
  return `coin ${pick.turnedAt} of ${pick.coins}`
}
