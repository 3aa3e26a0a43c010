import { useSuspenseQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import { awardWords } from '#src/lib/award-words.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { StateTicket } from '#src/ui/state-ticket.tsx'
import { drawQuery } from './api/get-draw.ts'
import { ChanceNote } from './components/winners-part.tsx'
import { CountdownPart } from './components/countdown-part.tsx'
import { drawLead, pickName } from './words.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => drawQuery(api, args.params.slug ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const { slug = '' } = useParams()
  const { data } = useSuspenseQuery(drawQuery(api, slug))
  return <Hall draw={data} />
}

/** The plain result, for a screen in a hall: the prizes in the order of the draw and who they went to. */
export function Hall({ draw }: { readonly draw: DrawPage }) {
  const picks = draw.result?.picks.filter((pick) => pick.award.kind === 'prize') ?? []
  return (
    <>
      <Head
        title={`In the hall: ${draw.title}`}
        description={`The result of ${draw.title}, for the screen in the hall.`}
        path={`/draws/${draw.slug}/hall`}
      />
      <Announcer words={draw.result ? 'The draw is settled.' : ''} />
      <Title
        broad
        title={draw.title}
        above={draw.organisation.name}
        lead={drawLead(draw)}
        stub={
          <>
            <StateTicket state={draw.state} />
            <p className="stub-facts">
              <Link to={`/draws/${draw.slug}`}>The draw’s own page</Link>
            </p>
          </>
        }
      />
      {draw.state === 'sealed' ? <CountdownPart draw={draw} /> : null}
      {picks.length > 0 ? (
        <Part title="Who won">
          <ol className="winners hall">
            {picks.map((pick) => (
              <li key={pick.pick}>
                <div>
                  <p className="prize">
                    <b>{awardWords(pick.award)}</b> {pick.award.kind === 'prize' ? pick.award.name : ''}
                  </p>
                  <p className="who">{pickName(pick)}</p>
                  <ChanceNote pick={pick} />
                </div>
              </li>
            ))}
          </ol>
        </Part>
      ) : null}
    </>
  )
}
