import { useQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { StateTicket } from '#src/ui/state-ticket.tsx'
import { Empty, Failure, Skeleton } from '#src/ui/states.tsx'
import { officeDrawsQuery } from './api/queries.ts'
import { drawPath, newDrawPath } from './paths.ts'
import { useRole } from './use-role.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => officeDrawsQuery(api, args.params.organisation ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const slug = useParams().organisation ?? ''
  const role = useRole()
  const { data, error, refetch } = useQuery(officeDrawsQuery(api, slug))
  if (!data) {
    return (
      <Title title="Draws">
        {error ? (
          <Failure
            title="The draws could not be read"
            detail={detailsOf(error).detail}
            onRetry={() => void refetch()}
          />
        ) : (
          <Skeleton label="Reading the draws" />
        )}
      </Title>
    )
  }
  const { organisation, draws } = data
  const mayMake = role !== 'witness' && organisation.state !== 'suspended'
  return (
    <>
      <Head title={`Draws: ${organisation.name}`} description="Every draw of this organisation." />
      <Title
        above={organisation.name}
        title="Draws"
        lead={role === 'witness' ? 'The draws that you witness.' : undefined}
      >
        {mayMake ? (
          <p className="buttons mt-unit">
            <ButtonLink to={newDrawPath(slug)}>Make a draw</ButtonLink>
          </p>
        ) : null}
      </Title>
      <Part title={draws.length === 0 ? 'None yet' : countOf(draws.length, 'draw')}>
        {draws.length === 0 ? (
          <Empty title={role === 'witness' ? 'You are named as witness in no draw.' : 'There is no draw yet.'}>
            {mayMake ? (
              <p>
                Make one: a title, the good cause, the terms, prizes in order, and the two times. Nothing is public
                until you open it.
              </p>
            ) : null}
          </Empty>
        ) : (
          <ul className="draw-list">
            {draws.map((draw) => (
              <li key={draw.id}>
                <div>
                  <p className="what">
                    <Link to={drawPath(slug, draw.id)}>{draw.title}</Link>
                  </p>
                  <p className="note">
                    {draw.state === 'drawn' || draw.state === 'concluded' ? 'Drawn' : 'To be drawn'}{' '}
                    {formatMoment(draw.drawAt, organisation.timeZone)}. {countOf(draw.entrants, 'entrant')},{' '}
                    {formatNumber(draw.tickets)} {draw.tickets === 1 ? 'ticket' : 'tickets'},{' '}
                    {countOf(draw.prizes, 'prize')}.{draw.demo ? ' A demonstration.' : ''}
                  </p>
                  {draw.waiting ? <p className="waits">{draw.waiting}</p> : null}
                </div>
                <StateTicket state={draw.state} />
              </li>
            ))}
          </ul>
        )}
      </Part>
    </>
  )
}
