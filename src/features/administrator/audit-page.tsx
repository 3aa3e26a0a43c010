import { useQuery } from '@tanstack/react-query'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { formatNumber } from '#src/ui/format-number.ts'
import { Part, Title } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Empty, Failure, Skeleton } from '#src/ui/states.tsx'
import { Time } from '#src/ui/time.tsx'
import { auditQuery, auditSearchFrom } from './api/queries.ts'

export async function loader(args: LoaderFunctionArgs) {
  const search = auditSearchFrom(new URL(args.request.url).searchParams)
  await load(args, (api) => auditQuery(api, search))
  return null
}

export function Component() {
  const { api } = useApp()
  const [params] = useSearchParams()
  const search = auditSearchFrom(params)
  const { data, error, refetch } = useQuery(auditQuery(api, search))
  const href = (page: number) => {
    const next = new URLSearchParams()
    if (search.q) next.set('q', search.q)
    if (search.organisation) next.set('organisation', search.organisation)
    if (page > 1) next.set('page', String(page))
    return `/admin/audit${next.size > 0 ? `?${next}` : ''}`
  }
  return (
    <>
      <Head title="Audit trail" description="Who did what, newest first." />
      <Title
        title="Audit trail"
        lead="Who did what, newest first, in UTC. Nothing here can be changed or taken away; names and details can be erased when they must be."
      />
      <Part title={search.organisation ? `Of ${search.organisation}` : 'Of the whole site'}>
        <SearchForm action="/admin/audit" label="Person, action or draw" query={search.q}>
          {search.organisation ? <input type="hidden" name="organisation" value={search.organisation} /> : null}
        </SearchForm>
        <div className="mt-unit-2">
          {data === undefined ? (
            error ? (
              <Failure
                title="The trail could not be read"
                detail={detailsOf(error).detail}
                onRetry={() => void refetch()}
              />
            ) : (
              <Skeleton label="Reading the audit trail" />
            )
          ) : data.items.length === 0 ? (
            <Empty title="Nothing fits." />
          ) : (
            <ul className="account">
              {data.items.map((entry) => (
                <li key={entry.id}>
                  <Time at={entry.at} timeZone="UTC" as="brief" thisYear={0} />
                  <div>
                    <p>{entry.sentence}</p>
                    <p className="exact">
                      {[entry.actor, entry.organisation, entry.draw?.title, `event ${formatNumber(Number(entry.id))}`]
                        .filter(Boolean)
                        .join(' · ')}
                    </p>
                  </div>
                </li>
              ))}
            </ul>
          )}
          {data ? (
            <Pager page={data.page} pageSize={data.pageSize} total={data.total} href={href} noun="events" />
          ) : null}
        </div>
      </Part>
    </>
  )
}
