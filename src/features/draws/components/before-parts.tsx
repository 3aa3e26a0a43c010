import type { DrawPage } from '#shared/schemas/api/public.ts'
import { countOf, formatMoney, formatNumber, numberWord } from '#src/ui/format-number.ts'
import { formatMoment, zoneName } from '#src/ui/format-time.ts'
import { Figures } from '#src/ui/figures.tsx'
import { Part } from '#src/ui/page.tsx'
import { prizeItems } from '../words.ts'

export function EnterPart({ draw }: { readonly draw: DrawPage }) {
  const price = draw.ticketPrice
  return (
    <Part title="How to enter" note={<p>Times are those of {zoneName(draw.timeZone)}</p>}>
      <div className="measure">
        <p>
          Tickets come from the promoter, not from this site: {draw.promoter.name}, {draw.promoter.address}.
          {price ? ` A ticket costs ${formatMoney(price)}.` : ' Entry is free.'}
        </p>
        <p>
          The list closes on {formatMoment(draw.closesAt, draw.timeZone)}, then it is sealed in public, and the prizes
          are drawn on {formatMoment(draw.drawAt, draw.timeZone)}. What comes in after closing is not in the draw.
        </p>
        {draw.minimumAge !== null && draw.minimumAge > 0 ? (
          <p>Entrants have to be {draw.minimumAge} or over, as the promoter states.</p>
        ) : null}
      </div>
    </Part>
  )
}

export function PrizesPart({ draw }: { readonly draw: DrawPage }) {
  if (draw.prizes.length === 0) return null
  const items = prizeItems(draw.prizes)
  return (
    <Part title={items === 1 ? 'The prize' : 'The prizes'} note={items === 1 ? undefined : <p>Drawn in this order</p>}>
      <ol className="prizes">
        {draw.prizes.map((prize) => (
          <li key={prize.id}>
            <span className="figure" aria-hidden="true" />
            <div>
              <p>
                <b>{prize.name}</b>
                {prize.quantity > 1 ? `, ${numberWord(prize.quantity)} of them` : ''}
              </p>
              {prize.description ? <p className="mt-0">{prize.description}</p> : null}
              {prize.donor || prize.value ? (
                <p className="note mt-0">
                  {[
                    prize.value ? `Worth ${formatMoney(prize.value)}, as the promoter states.` : '',
                    prize.donor ? `Given by ${prize.donor}.` : '',
                  ]
                    .filter(Boolean)
                    .join(' ')}
                </p>
              ) : null}
            </div>
          </li>
        ))}
      </ol>
      <p className="note measure mt-unit">
        {draw.rule === 'one-prize-each'
          ? 'One prize at most for each entrant: who has won leaves the list with all their tickets.'
          : 'Every ticket counts for itself: a ticket that has won leaves the list, its holder’s other tickets stay in.'}
        {draw.reserves > 0
          ? ` ${countOf(draw.reserves, 'reserve is', 'reserves are')} drawn after the prizes, to be called in order if a prize is not claimed.`
          : ''}
      </p>
    </Part>
  )
}

export function TermsPart({ draw }: { readonly draw: DrawPage }) {
  const folded = draw.state !== 'open' && draw.terms.length > 400
  const text = <div className="terms measure">{draw.terms}</div>
  return (
    <Part
      title="The terms"
      note={draw.openedAt ? <p>As published on {formatMoment(draw.openedAt, draw.timeZone)}</p> : undefined}
    >
      {folded ? (
        <details className="fold">
          <summary>Read the terms</summary>
          {text}
        </details>
      ) : (
        text
      )}
    </Part>
  )
}

export function FixesPart({ draw }: { readonly draw: DrawPage }) {
  const { seal } = draw
  if (!seal) return null
  const items = prizeItems(seal.prizes)
  const few = seal.prizes.length <= 5 ? `: ${seal.prizes.map((prize) => prize.name).join('; ')}` : ''
  return (
    <Part title="What it fixes">
      <Figures
        items={[
          {
            figure: formatNumber(seal.entrants),
            words: `${seal.entrants === 1 ? 'entrant' : 'entrants, each'} with a number of tickets that nobody can now change`,
          },
          { figure: formatNumber(seal.tickets), words: 'tickets in all: every one weighs the same' },
          {
            figure: formatNumber(items),
            words: items === 1 ? `prize${few}` : `prizes, drawn in this order${few}`,
          },
          ...(seal.reserves > 0
            ? [
                {
                  figure: formatNumber(seal.reserves),
                  words: `${seal.reserves === 1 ? 'reserve' : 'reserves'}, called in order if a prize is not claimed`,
                },
              ]
            : []),
          seal.rule === 'one-prize-each'
            ? { figure: '1', words: 'prize at most for each entrant: who has won leaves the list' }
            : { figure: '1', words: 'ticket leaves with each prize: its holder’s other tickets stay in' },
          ...(seal.beacon
            ? [
                {
                  figure: formatNumber(seal.beacon.round),
                  words: beaconWords(draw),
                },
              ]
            : []),
        ]}
      />
    </Part>
  )
}

function beaconWords(draw: DrawPage): string {
  if (draw.result) return 'the beacon round that gave the random number. When the list was sealed it did not exist.'
  const at = draw.seal?.beacon?.at
  return `the beacon round that will give the random number${at ? `, on ${formatMoment(at, draw.timeZone, true)}` : ''}. It does not exist yet, and nobody can choose it.`
}
