import { localWords } from '#server/time/local-time.ts'
import { dateOf } from '#server/time/instants.ts'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import type { LadderCoin } from '#shared/sampling/ladder-shape.ts'

/** What a result card shows of a draw. All words are plain text. */
export interface CardFacts {
  readonly title: string
  readonly organisation: string
  /** Where it stands, a sentence. */
  readonly state: string
  /** What the reader must know beforehand, or null. */
  readonly warning: string | null
  /** The size of the sealed list, or null. */
  readonly list: string | null
  readonly winners: readonly { readonly prize: string; readonly label: string }[]
  /** How many winners there are beyond those. */
  readonly more: number
  /** The seal's digest in short, or null. */
  readonly seal: string | null
  /** The walk to the first prize, or null. */
  readonly walk: readonly LadderCoin[] | null
  readonly page: string
}

const WINNERS = 5
const figure = (count: number, one: string) => `${count.toLocaleString('en-GB')} ${count === 1 ? one : `${one}s`}`

export function cardFacts(draw: DrawPage, origin: string): CardFacts {
  const won = (draw.result?.picks ?? []).flatMap(({ award, label, coins }) =>
    award.kind === 'prize' ? [{ award, label, coins }] : [],
  )
  const items = Math.min(
    draw.prizes.reduce((sum, { quantity }) => sum + quantity, 0),
    draw.result?.pickCount ?? 0,
  )
  const winners = won.slice(0, WINNERS).map(({ award, label }) => ({
    prize: award.of > 1 ? `${award.name}, ${award.item} of ${award.of}` : award.name,
    label: label ?? 'Name withheld',
  }))
  return {
    title: draw.title,
    organisation: draw.organisation.name,
    state: stateWords(draw),
    warning: draw.demo
      ? 'A demonstration: everything here is invented.'
      : draw.organisation.suspended
        ? 'The site has suspended this organisation.'
        : null,
    list: draw.seal ? `${figure(draw.seal.entrants, 'entrant')}, ${figure(draw.seal.tickets, 'ticket')}` : null,
    winners,
    more: Math.max(0, items - winners.length),
    seal: draw.seal ? `${draw.seal.digest.slice(0, 8)} … ${draw.seal.digest.slice(-8)}` : null,
    walk: won[0]?.coins.length ? won[0].coins : null,
    page: `${origin}/draws/${draw.slug}`,
  }
}

function stateWords(draw: DrawPage): string {
  const at = (instant: string) => localWords(dateOf(instant), draw.timeZone)
  switch (draw.state) {
    case 'draft':
      return 'Being prepared.'
    case 'open':
      return `Open until ${at(draw.closesAt)}.`
    case 'closed':
      return `Closed. To be drawn on ${at(draw.drawAt)}.`
    case 'sealed':
      return `Sealed. To be drawn on ${at(draw.seal?.drawAt ?? draw.drawAt)}.`
    case 'drawn':
    case 'concluded':
      return `Drawn on ${at(draw.result?.drawnAt ?? draw.drawAt)}.`
    case 'cancelled':
      return 'Cancelled. No prize was settled.'
    case 'failed':
      return 'Failed. No prize was settled.'
  }
}
