import { useSuspenseQuery } from '@tanstack/react-query'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { eventMeaning, eventTitle } from '#src/lib/event-words.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { Digest } from '#src/ui/digest.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { formatBrief } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { Empty } from '#src/ui/states.tsx'
import { logPageFrom, logQuery } from './api/get-log.ts'

export async function loader(args: LoaderFunctionArgs) {
  const page = logPageFrom(new URL(args.request.url).searchParams)
  await load(args, (api) => logQuery(api, page))
  return null
}

const LEAD =
  'Everything that happened to every draw on this site, newest first. A line is added in the same step as what it tells, and none is ever changed or taken away.'

export function Component() {
  const { api } = useApp()
  const [params] = useSearchParams()
  const page = logPageFrom(params)
  const { data } = useSuspenseQuery(logQuery(api, page))
  return (
    <>
      <Head title="The log" description={LEAD} {...(page > 1 ? {} : { path: '/log' })} />
      <Title title="The log" lead={LEAD} />
      <Part title="Entries" note={<p>{countOf(data.total, 'entry', 'entries')}. Times are UTC.</p>}>
        {data.items.length === 0 ? (
          <Empty title={data.total === 0 ? 'Nothing has happened yet.' : 'There is no such page of the log.'} />
        ) : (
          <ol className="account">
            {data.items.map((line) => (
              <li key={line.index} id={`entry-${line.index}`}>
                <time dateTime={line.at}>{formatBrief(line.at, 'UTC', 0)}</time>
                <div>
                  <h3>{eventTitle(line.event)}</h3>
                  <p>
                    {line.draw ? <Link to={`/draws/${line.draw.slug}`}>{line.draw.title}</Link> : null}
                    {line.draw && line.organisation ? ', ' : ''}
                    {line.organisation ? (
                      <Link to={`/organisations/${line.organisation.slug}`}>{line.organisation.name}</Link>
                    ) : null}
                    {line.draw || line.organisation ? '. ' : ''}
                    {eventMeaning(line.event)}
                  </p>
                  {line.note ? <p className="mt-0">“{line.note}”</p> : null}
                  <div className="exact">
                    Entry {line.index}
                    {line.digest ? (
                      <>
                        , <Digest value={line.digest} what={`the digest of entry ${line.index}`} />
                      </>
                    ) : null}
                  </div>
                </div>
              </li>
            ))}
          </ol>
        )}
        <Pager
          page={data.page}
          pageSize={data.pageSize}
          total={data.total}
          href={(number) => `/log?page=${number}`}
          noun="entries"
        />
      </Part>
    </>
  )
}
