import type { DrawCard, DrawPage, PickSummary } from '#shared/schemas/api/public.ts'
import { capitalise, countOf, numberWord } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'

/** The words that announce the entrant, or why there are none. */
export function pickName(pick: PickSummary): string {
  if (pick.label !== null) return pick.label
  return pick.labelState === 'withheld' ? 'Name withheld' : 'Named when called'
}

export function prizeItems(prizes: readonly { readonly quantity: number }[]): number {
  return prizes.reduce((sum, prize) => sum + prize.quantity, 0)
}

/** The first sentences of a draw's page: where it stands, in plain words. */
export function drawLead(draw: DrawPage): string {
  const at = (instant: string) => formatMoment(instant, draw.timeZone)
  const items = prizeItems(draw.prizes)
  const prizes = countOf(items, 'prize', 'prizes', true)
  switch (draw.state) {
    case 'draft':
      return 'This draw is being prepared.'
    case 'open':
      return `Entries are open until ${at(draw.closesAt)}. ${capitalise(prizes)} will be drawn on ${at(draw.drawAt)}.`
    case 'closed':
      return `The list is closed. It will be sealed in public, and ${prizes} will be drawn on ${at(draw.drawAt)}.`
    case 'sealed': {
      const list = draw.seal
        ? `: ${countOf(draw.seal.entrants, 'entrant')}, ${countOf(draw.seal.tickets, 'ticket')}`
        : ''
      return `The list is closed and sealed${list}. ${capitalise(prizes)} will be settled on ${at(draw.seal?.drawAt ?? draw.drawAt)}.`
    }
    case 'drawn':
    case 'concluded':
      return drawnLead(draw, items)
    case 'cancelled':
      return 'This draw was cancelled. No prize was settled, and none will be.'
    case 'failed':
      return 'This draw has failed, for good. Nothing may stand in for a source of chance that its seal named.'
  }
}

function drawnLead(draw: DrawPage, items: number): string {
  if (!draw.result || !draw.seal) return 'The prizes are settled.'
  const all = draw.result.picks.length === draw.result.pickCount
  const won = draw.result.picks.filter((pick) => pick.award.kind === 'prize')
  const people = new Set(won.map((pick) => pick.leaf)).size
  const given = all ? won.length : Math.min(items, draw.result.pickCount)
  const entrants = countOf(draw.seal.entrants, 'entrant')
  const went = all
    ? `${capitalise(countOf(given, 'prize', 'prizes', true))} went to ${numberWord(people)} of the ${entrants}.`
    : `${capitalise(countOf(given, 'prize', 'prizes', true))} went to the holders of ${countOf(draw.seal.tickets, 'ticket')}.`
  const short = given < items ? ` No ticket was left for ${numberWord(items - given)} more.` : ''
  return `${went}${short} Coins weighted by their tickets settled who, and every coin is here to check.`
}

/** A draw in a list: the one time that matters in its state. */
export function cardWords(card: DrawCard): string {
  const at = (instant: string) => formatMoment(instant, card.timeZone)
  switch (card.state) {
    case 'draft':
      return 'Being prepared.'
    case 'open':
      return `Open until ${at(card.closesAt)}. To be drawn on ${at(card.drawAt)}.`
    case 'closed':
      return `Closed. To be drawn on ${at(card.drawAt)}.`
    case 'sealed':
      return `${listSize(card)}To be drawn on ${at(card.drawAt)}.`
    case 'drawn':
    case 'concluded':
      return `${listSize(card)}Drawn on ${at(card.drawnAt ?? card.drawAt)}.`
    case 'cancelled':
      return 'Cancelled. No prize was settled.'
    case 'failed':
      return 'Failed. No prize was settled.'
  }
}

function listSize(card: DrawCard): string {
  if (card.entrants === null || card.tickets === null) return ''
  return `${countOf(card.entrants, 'entrant')}, ${countOf(card.tickets, 'ticket')}. `
}

/** The last event of a kind in a draw's history. */
export function lastEvent(draw: Pick<DrawPage, 'history'>, event: string) {
  return draw.history.filter((line) => line.event === event).at(-1) ?? null
}
