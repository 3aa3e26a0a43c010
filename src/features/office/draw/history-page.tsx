import { useQuery } from '@tanstack/react-query'
import { useParams, useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { getDrawAudit } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { DataTable, type Column } from '#src/ui/data-table.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Empty, Failure, Skeleton } from '#src/ui/states.tsx'
import { Time } from '#src/ui/time.tsx'
import { auditQuery } from '../api/queries.ts'
import { drawPath } from '../paths.ts'
import { changesOf, type Change } from './changes.ts'
import { useDraw } from './use-draw.ts'

function searchFrom(params: URLSearchParams) {
  const { shape } = getDrawAudit.query
  return {
    q: params.get('q')?.trim().slice(0, 100) ?? '',
    page: shape.page.safeParse(params.get('page') ?? undefined).data ?? 1,
  }
}

export async function loader(args: LoaderFunctionArgs) {
  const search = searchFrom(new URL(args.request.url).searchParams)
  await load(args, (api) => auditQuery(api, args.params.draw ?? '', search))
  return null
}

export function Component() {
  const { api } = useApp()
  const draw = useDraw()
  const organisation = useParams().organisation ?? ''
  const [params] = useSearchParams()
  const search = searchFrom(params)
  const { data, error, refetch } = useQuery(auditQuery(api, draw.id, search))
  const path = drawPath(organisation, draw.id, 'history')
  const href = (page: number) => {
    const next = new URLSearchParams()
    if (search.q) next.set('q', search.q)
    if (page > 1) next.set('page', String(page))
    return `${path}${next.size > 0 ? `?${next}` : ''}`
  }
  return (
    <>
      <Head title={`Who changed what: ${draw.title}`} description="Every change of this draw, newest first." />
      <Part
        title="Who changed what"
        note="Newest first. Nothing here can be changed; names and details can be erased when they must be."
      >
        <SearchForm action={path} label="Person or words" query={search.q} />
        <div className="mt-unit-3">
          {data === undefined ? (
            error ? (
              <Failure
                title="The trail could not be read"
                detail={detailsOf(error).detail}
                onRetry={() => void refetch()}
              />
            ) : (
              <Skeleton label="Reading the trail" />
            )
          ) : data.items.length === 0 ? (
            <Empty title={search.q ? 'Nothing fits.' : 'Nothing has been changed yet.'}>
              {search.q ? (
                <p>
                  <Link to={path}>Show everything</Link>.
                </p>
              ) : null}
            </Empty>
          ) : (
            <ul className="account">
              {data.items.map((entry) => (
                <Entry key={entry.id} entry={entry} timeZone={draw.timeZone} />
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

interface EntryProps {
  readonly entry: ResponseOf<typeof getDrawAudit>['items'][number]
  readonly timeZone: string
}

function Entry({ entry, timeZone }: EntryProps) {
  const changes = changesOf(entry.before, entry.after, timeZone)
  return (
    <li>
      <Time at={entry.at} timeZone={timeZone} as="brief" />
      <div>
        <p>{entry.sentence}</p>
        <p className="exact">{entry.actor ?? 'The site itself'}</p>
        {changes.length > 0 ? (
          <details className="changes">
            <summary>See {countOf(changes.length, 'field')}</summary>
            <Changes changes={changes} before={entry.before !== null} after={entry.after !== null} />
          </details>
        ) : null}
      </div>
    </li>
  )
}

interface ChangesProps {
  readonly changes: readonly Change[]
  /** Whether there was anything before; whether there is anything after. */
  readonly before: boolean
  readonly after: boolean
}

function Changes({ changes, before, after }: ChangesProps) {
  const old: Column<Change> = { key: 'before', head: 'Before', cell: (change) => change.before ?? 'none' }
  const now: Column<Change> = {
    key: 'after',
    head: before ? 'After' : 'Value',
    cell: (change) => change.after ?? 'none',
  }
  return (
    <DataTable
      dense
      rows={changes}
      rowKey={(change) => change.field}
      columns={[
        { key: 'field', head: 'Field', rowHead: true, cell: (change) => change.field },
        ...(before ? [old] : []),
        ...(after ? [now] : []),
      ]}
    />
  )
}
