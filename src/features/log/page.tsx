import { useSuspenseQuery } from '@tanstack/react-query'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Part, Title } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { Empty } from '#src/ui/states.tsx'
import { logPlaceFrom, logQuery, logStateQuery } from './api/get-log.ts'
import { Entry } from './components/entry.tsx'
import { GoToEntry } from './components/go-to-entry.tsx'
import { CheckLogPart, StandingPart } from './components/standing-part.tsx'
import { OverduePart } from './components/overdue-part.tsx'

export async function loader(args: LoaderFunctionArgs) {
  const place = logPlaceFrom(new URL(args.request.url).searchParams)
  await Promise.all([load(args, (api) => logQuery(api, place)), load(args, logStateQuery)])
  return null
}

const LEAD =
  'Everything that happened to every draw on this site, newest first. A line is added in the same step as what it tells, and none is ever changed or taken away.'

export function Component() {
  const { api } = useApp()
  const [params] = useSearchParams()
  const place = logPlaceFrom(params)
  const { data } = useSuspenseQuery(logQuery(api, place))
  const { data: state } = useSuspenseQuery(logStateQuery(api))
  const missing = place.at !== undefined && place.at >= data.total
  return (
    <>
      <Head
        title="The log"
        description={LEAD}
        {...(place.page > 1 || place.at !== undefined ? {} : { path: '/log' })}
      />
      <Title title="The log" lead={LEAD} />
      <StandingPart state={state} />
      <OverduePart draws={state.overdue} />
      <Part title="Entries" note={<p>{countOf(data.total, 'entry', 'entries')}. Times are UTC.</p>}>
        <GoToEntry asked={params.get('at') ?? ''} />
        {missing ? (
          <p className="mt-unit">
            There is no entry {formatNumber(place.at ?? 0)} yet: the newest is entry {formatNumber(data.total - 1)}.
          </p>
        ) : null}
        {data.items.length === 0 ? (
          <Empty title={data.total === 0 ? 'Nothing has happened yet.' : 'There is no such page of the log.'} />
        ) : (
          <ol className="account mt-unit-2">
            {data.items.map((line) => (
              <Entry key={line.index} line={line} asked={line.index === place.at} />
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
      <CheckLogPart head={state.head} />
    </>
  )
}
