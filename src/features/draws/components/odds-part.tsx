import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useSearchParams } from 'react-router'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import type { OddsView } from '#shared/schemas/api/odds.ts'
import { useApp } from '#src/lib/app-context.ts'
import { ticketsAsked, TICKETS_WRONG } from '#src/lib/tickets-asked.ts'
import { Button } from '#src/ui/button.tsx'
import { TextField } from '#src/ui/field.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { OddsAnswer, OddsChart, OddsTable } from '#src/ui/odds.tsx'
import { Part } from '#src/ui/page.tsx'
import { Waffle } from '#src/ui/waffle.tsx'
import { hasOdds, oddsQuery } from '../api/get-odds.ts'

const TITLE = 'What are the odds?'
/** So many tickets can still be shown one by one. */
const MOST_DOTS = 200

/** What numbers of tickets give: from the seal on exactly, before it as the list stands. */
export function OddsPart({ draw }: { readonly draw: DrawPage }) {
  return hasOdds(draw) ? <Odds draw={draw} /> : <ToCome />
}

function Odds({ draw }: { readonly draw: DrawPage }) {
  const { api } = useApp()
  const [params] = useSearchParams()
  const [typed, setTyped] = useState(params.get('tickets') ?? '')
  const asked = ticketsAsked(typed)
  const { data: odds } = useQuery(oddsQuery(api, draw, asked === 'wrong' ? null : asked))
  if (!odds || (odds.state === 'empty' && odds.basis === 'joining')) return <ToCome />
  if (odds.state !== 'ready') return <NotReady odds={odds} />
  const joining = odds.basis === 'joining'
  return (
    <Part
      title={TITLE}
      id="odds"
      note={
        <p>{joining ? 'As the list stands now' : `Of the ${countOf(odds.tickets, 'ticket')} in the sealed list`}</p>
      }
    >
      {joining ? (
        <p className="measure mb-unit">
          Every ticket weighs the same, bought or free. So far the list holds {countOf(odds.tickets, 'ticket')}. This is
          what tickets would give that were added now; with every further ticket the chance of each grows smaller, until
          the list closes.
        </p>
      ) : null}
      <Waffles odds={odds} />
      <OddsTable rows={odds.rows} of={odds} head="If you hold" />
      <OddsChart rows={odds.rows} of={odds} />
      <form
        className="odds-form"
        method="get"
        action={`/draws/${draw.slug}#odds`}
        role="search"
        aria-label="The odds of a number of tickets"
        onSubmit={(event) => {
          event.preventDefault()
          setTyped(String(new FormData(event.currentTarget).get('tickets') ?? ''))
        }}
      >
        <TextField
          name="tickets"
          label="How many tickets?"
          inputMode="numeric"
          autoComplete="off"
          size="short"
          maxLength={13}
          defaultValue={params.get('tickets') ?? ''}
          error={asked === 'wrong' ? TICKETS_WRONG : undefined}
        />
        <Button type="submit" quiet native>
          Show the odds
        </Button>
      </form>
      <div className="measure" role="status">
        {odds.asked && odds.asked.tickets === asked ? (
          <OddsAnswer row={odds.asked} of={odds} nobody={nobodyWords(odds, odds.asked.tickets)} />
        ) : null}
      </div>
      <p className="note measure mt-unit">{ruleWords(odds)}</p>
    </Part>
  )
}

function nobodyWords({ basis }: OddsView, tickets: number): string {
  if (basis === 'joining') return 'Counted as one more entrant beside the list as it stands now.'
  return `Nobody in the sealed list holds ${countOf(tickets, 'ticket')}. These are the odds that one more entrant with as many would have had.`
}

function ruleWords({ rule, prizes }: OddsView) {
  return (
    <>
      {prizes > 1
        ? rule === 'one-prize-each'
          ? 'Over all prizes it is counted that who has won leaves the list with all their tickets. '
          : 'Over all prizes it is counted that a ticket that has won leaves the list. '
        : ''}
      For one later prize the chance is the tickets you still have in over all that are then still in. It stands beside
      each winner. <Link to="/how-it-works#odds">How the odds are worked out</Link>
    </>
  )
}

function Waffles({ odds }: { readonly odds: OddsView }) {
  const rows = odds.rows.filter(({ total }) => total <= MOST_DOTS)
  if (rows.length === 0) return null
  // Three at most: the least, the middle and the most.
  const shown = rows.length <= 3 ? rows : [0, (rows.length - 1) >> 1, rows.length - 1].flatMap((at) => rows[at] ?? [])
  return (
    <div className="waffles">
      {shown.map(({ tickets, total }) => (
        <figure key={tickets}>
          <Waffle filled={tickets} total={total} />
          <figcaption>
            <b>{countOf(tickets, 'ticket')}</b>
            <br />
            {formatNumber(tickets)} of the {formatNumber(total)}
          </figcaption>
        </figure>
      ))}
    </div>
  )
}

/** What cannot be known yet about the odds. */
function ToCome() {
  return (
    <Part title={TITLE} id="odds">
      <p className="measure">
        Every ticket weighs the same, bought or free. Your chance of the first prize is the tickets you hold over all
        the tickets in. How many are in is known when the list is sealed, before the draw, and stands here then.
      </p>
    </Part>
  )
}

function NotReady({ odds }: { readonly odds: OddsView }) {
  return (
    <Part title={TITLE} id="odds">
      <p className="measure">
        Every ticket weighs the same. The chance of the first prize is the tickets held over the{' '}
        {countOf(odds.tickets, 'ticket')} in.{' '}
        {odds.state === 'working'
          ? 'The chances over all prizes are being worked out: the list has very many different numbers of tickets. They stand here in a minute or two.'
          : 'The chances over all prizes stand here when the list is sealed.'}
      </p>
    </Part>
  )
}
