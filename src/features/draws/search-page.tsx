import { useSuspenseQuery } from '@tanstack/react-query'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { SelectField } from '#src/ui/field.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Empty } from '#src/ui/states.tsx'
import { searchFrom, searchQuery } from './api/search-draws.ts'
import { DrawList } from './components/draw-list.tsx'

const STATES = [
  { value: 'all', text: 'In any state' },
  { value: 'open', text: 'Open for entries' },
  { value: 'closed', text: 'Closed, not yet sealed' },
  { value: 'sealed', text: 'Sealed, to be drawn' },
  { value: 'drawn', text: 'Drawn' },
  { value: 'concluded', text: 'Concluded' },
  { value: 'cancelled', text: 'Cancelled' },
  { value: 'failed', text: 'Failed' },
]

export async function loader(args: LoaderFunctionArgs) {
  const search = searchFrom(new URL(args.request.url).searchParams)
  await load(args, (api) => searchQuery(api, search))
  return null
}

export function Component() {
  const { api } = useApp()
  const [params] = useSearchParams()
  const search = searchFrom(params)
  const { data } = useSuspenseQuery(searchQuery(api, search))
  const searching = search.q !== '' || search.state !== 'all'
  const href = (page: number) =>
    `/draws?${new URLSearchParams({ q: search.q, state: search.state, page: String(page) })}`
  return (
    <>
      <Head
        title="Draws"
        description="Search the public draws by title, organisation or cause, and see how each was settled."
        {...(searching || search.page > 1 ? {} : { path: '/draws' })}
      />
      <Title
        title="Draws"
        lead="Every draw that has opened stays here: what was promised, what was sealed, who won and by which coins."
      />
      <Part title="Search">
        <SearchForm action="/draws" label="Title, organisation, place or cause" query={search.q}>
          <SelectField
            name="state"
            label="State"
            options={STATES}
            defaultValue={search.state}
            key={search.state}
            fieldClass="narrow"
          />
        </SearchForm>
      </Part>
      <Part
        title={searching ? 'What was found' : 'All draws'}
        note={<p role="status">{data.total === 0 ? 'None' : countOf(data.total, 'draw')}</p>}
      >
        {data.items.length === 0 ? (
          <Empty title={searching ? 'No draw fits that search.' : 'No draw is public yet.'}>
            {searching ? (
              <p>
                Try fewer words, or another state. <Link to="/draws">Show all draws</Link>
              </p>
            ) : null}
          </Empty>
        ) : (
          <DrawList draws={data.items} />
        )}
        <Pager page={data.page} pageSize={data.pageSize} total={data.total} href={href} noun="draws" />
      </Part>
    </>
  )
}
