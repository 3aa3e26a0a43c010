import { useQuery } from '@tanstack/react-query'
import { NavLink, Outlet, useLocation, useParams, type LoaderFunctionArgs } from 'react-router'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Title } from '#src/ui/page.tsx'
import { StateTicket } from '#src/ui/state-ticket.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { useFocusWhenLost } from '#src/ui/use-focus-when-lost.ts'
import { officeDrawQuery } from '../api/queries.ts'
import { drawPath, drawsPath, type Step } from '../paths.ts'
import { useRole } from '../use-role.ts'
import { roadOf, type Stage } from './road.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => officeDrawQuery(api, args.params.draw ?? ''))
  return null
}

/** The head of every page of a draw: title, state, counts, and the road of its steps. */
export function Component() {
  const { api } = useApp()
  const { draw: id = '', organisation = '' } = useParams()
  const { data: draw, error, refetch } = useQuery(officeDrawQuery(api, id))
  useFocusWhenLost(`${id} ${draw?.state}`)
  if (!draw) {
    return (
      <Title title="Draw">
        {error ? (
          <Failure title="The draw could not be read" detail={detailsOf(error).detail} onRetry={() => void refetch()} />
        ) : (
          <Skeleton label="Reading the draw" />
        )}
      </Title>
    )
  }
  return (
    <>
      <Title
        stub={<Road draw={draw} organisation={organisation} />}
        above={<Link to={drawsPath(organisation)}>{draw.organisation.name}</Link>}
        title={draw.title}
      >
        <p className="state-line">
          <StateTicket state={draw.state} /> <span className="note">{sinceWords(draw)}</span>
        </p>
        <dl className="tally mt-unit-2">
          <div>
            <dt>Entrants</dt>
            <dd>{formatNumber(draw.counts.entrants)}</dd>
          </div>
          <div>
            <dt>Tickets in the list</dt>
            <dd>{formatNumber(draw.counts.tickets)}</dd>
          </div>
          <div>
            <dt>Prizes</dt>
            <dd>{formatNumber(draw.prizes.reduce((sum, prize) => sum + prize.quantity, 0))}</dd>
          </div>
          <div>
            <dt>Reserves</dt>
            <dd>{formatNumber(draw.reserves)}</dd>
          </div>
        </dl>
      </Title>
      <Outlet />
    </>
  )
}

function sinceWords(draw: OfficeDraw): string {
  const moment = (at: string) => formatMoment(at, draw.timeZone)
  switch (draw.state) {
    case 'draft':
      return 'Only your organisation sees it.'
    case 'open':
      return `The list closes ${moment(draw.closesAt)}.`
    case 'closed':
      return draw.closedAt ? `since ${moment(draw.closedAt)}. To be drawn ${moment(draw.drawAt)}.` : ''
    case 'sealed':
      return draw.sealedAt ? `since ${moment(draw.sealedAt)}. To be drawn ${moment(draw.drawAt)}.` : ''
    case 'drawn':
    case 'concluded':
      return draw.drawnAt ? moment(draw.drawnAt) : ''
    case 'cancelled':
      return 'for good'
    case 'failed':
      return 'Its randomness could not be had in time.'
  }
}

const MARK_WORDS: Record<Stage['mark'], string> = { done: ', done', now: ', being worked on', ahead: '' }

function Road({ draw, organisation }: { readonly draw: OfficeDraw; readonly organisation: string }) {
  const witness = useRole() === 'witness'
  const { pathname } = useLocation()
  const isCurrent = (step: Step) =>
    pathname === drawPath(organisation, draw.id, step) ||
    // Bringing in a sheet is work on the list of entrants.
    (step === 'entrants' && pathname.startsWith(drawPath(organisation, draw.id, 'import')))
  // The draw itself comes by itself; and a witness sees nobody's name, address or number.
  const linked = (step: Stage['step']) => step !== '' && !(witness && (step === 'entrants' || step === 'seal'))
  return (
    <nav aria-label="Steps of this draw">
      <ol className="road">
        <li className="first">
          <NavLink to={drawPath(organisation, draw.id)} end>
            Overview
          </NavLink>
        </li>
        {roadOf(draw).map((stage) => (
          <li key={stage.step} className={stage.mark}>
            {linked(stage.step) ? (
              <Link
                to={drawPath(organisation, draw.id, stage.step)}
                aria-current={isCurrent(stage.step) ? 'page' : undefined}
              >
                {stage.title}
              </Link>
            ) : (
              stage.title
            )}
            <span className="vh">{MARK_WORDS[stage.mark]}</span>
          </li>
        ))}
        {witness ? null : (
          <li className="apart">
            <NavLink to={drawPath(organisation, draw.id, 'history')}>Who changed what</NavLink>
          </li>
        )}
      </ol>
    </nav>
  )
}
