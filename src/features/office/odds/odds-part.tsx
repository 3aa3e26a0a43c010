import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import type { OddsView } from '#shared/schemas/api/odds.ts'
import { useApp } from '#src/lib/app-context.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { TextField } from '#src/ui/field.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { OddsAnswer, OddsTable } from '#src/ui/odds.tsx'
import { Part } from '#src/ui/page.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { ticketsAsked, TICKETS_WRONG } from '#src/lib/tickets-asked.ts'
import { officeOddsQuery } from './get-odds.ts'

interface OddsPartProps {
  readonly drawId: string
  /** Entrants in the list now: without any, an expected list stands in. */
  readonly entrants: number
  /** Items as they are typed at this moment, where they are being set. */
  readonly prizes?: number
}

/** What tickets give with the present list, or with the list that is expected. */
export function OddsPart({ drawId, entrants, prizes }: OddsPartProps) {
  const { api } = useApp()
  const [typed, setTyped] = useState('')
  const [expected, setExpected] = useState({ entrants: '100', tickets: '300' })
  const asked = ticketsAsked(typed)
  const list = entrants > 0 ? null : { entrants: countFrom(expected.entrants), allTickets: countFrom(expected.tickets) }
  const right = list === null || (list.entrants !== null && list.allTickets !== null)
  const { data, error, refetch } = useQuery({
    ...officeOddsQuery(api, drawId, {
      ...(typeof asked === 'number' ? { tickets: asked } : {}),
      ...(prizes !== undefined && prizes >= 1 ? { prizes } : {}),
      ...(list?.entrants && list.allTickets ? { entrants: list.entrants, allTickets: list.allTickets } : {}),
    }),
    enabled: right && prizes !== 0,
  })
  return (
    <Part title="What tickets give" note={list ? 'With the list that you expect' : 'With the list as it stands now'}>
      {list ? (
        <div className="pair mb-unit">
          <TextField
            name="expected-entrants"
            label="Entrants expected"
            inputMode="numeric"
            size="short"
            value={expected.entrants}
            error={list.entrants === null ? WRONG : undefined}
            onChange={(event) => setExpected({ ...expected, entrants: event.target.value })}
          />
          <TextField
            name="expected-tickets"
            label="Tickets in all"
            inputMode="numeric"
            size="short"
            value={expected.tickets}
            error={list.allTickets === null ? WRONG : undefined}
            onChange={(event) => setExpected({ ...expected, tickets: event.target.value })}
          />
        </div>
      ) : null}
      {prizes === 0 ? (
        <p>Name a prize to see what tickets give.</p>
      ) : data ? (
        <Shown odds={data} typed={typed} onTyped={setTyped} />
      ) : error ? (
        <Failure
          title="The odds could not be worked out"
          detail={detailsOf(error).detail}
          onRetry={() => void refetch()}
        />
      ) : (
        <Skeleton label="Working out the odds" />
      )}
    </Part>
  )
}

const WRONG = 'Type a whole number from 1.'
const countFrom = (typed: string): number | null => {
  const text = typed.trim().replaceAll(',', '')
  return /^\d{1,9}$/.test(text) && Number(text) >= 1 && Number(text) <= 2_000_000_000 ? Number(text) : null
}

function Shown({
  odds,
  typed,
  onTyped,
}: {
  readonly odds: OddsView
  readonly typed: string
  readonly onTyped: (typed: string) => void
}) {
  if (odds.state === 'empty') return <p className="measure">The odds show here once there are entrants and prizes.</p>
  if (odds.state === 'working')
    return <p role="status">The odds of this list are being worked out. It takes a minute or two.</p>
  if (odds.state === 'unknown') {
    return (
      <p className="measure">
        The list holds so many different numbers of tickets that the odds are worked out once, when it is sealed.
      </p>
    )
  }
  const held = odds.basis === 'present' || odds.basis === 'sealed'
  const asked = ticketsAsked(typed)
  return (
    <>
      <p className="measure mb-unit">
        {countOf(odds.entrants, 'entrant')} with {countOf(odds.tickets, 'ticket')}; {countOf(odds.prizes, 'item')} to be
        won
        {odds.reserves > 0 ? `, then ${countOf(odds.reserves, 'reserve')}` : ''}.
        {odds.basis === 'expected'
          ? ' The tickets are taken to be spread evenly; the odds are those of one more entrant.'
          : ''}
      </p>
      <OddsTable rows={odds.rows} of={odds} head="Holding" held={held} />
      <div className="odds-form">
        <TextField
          name="odds-tickets"
          label="How many tickets?"
          inputMode="numeric"
          size="short"
          value={typed}
          error={asked === 'wrong' ? TICKETS_WRONG : undefined}
          onChange={(event) => onTyped(event.target.value)}
        />
      </div>
      <div className="measure" role="status">
        {odds.asked && odds.asked.tickets === asked ? (
          <OddsAnswer
            row={odds.asked}
            of={odds}
            nobody={
              held
                ? `Nobody in the list holds ${formatNumber(odds.asked.tickets)}: the odds of one more entrant with as many.`
                : null
            }
          />
        ) : null}
      </div>
    </>
  )
}
