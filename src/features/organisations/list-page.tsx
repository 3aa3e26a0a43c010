import { useSuspenseQuery } from '@tanstack/react-query'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { countOf } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Empty } from '#src/ui/states.tsx'
import { organisationSearch, organisationsQuery } from './api/get-organisations.ts'

export async function loader(args: LoaderFunctionArgs) {
  const search = organisationSearch(new URL(args.request.url).searchParams)
  await load(args, (api) => organisationsQuery(api, search))
  return null
}

export function Component() {
  const { api } = useApp()
  const [params] = useSearchParams()
  const search = organisationSearch(params)
  const { data } = useSuspenseQuery(organisationsQuery(api, search))
  const href = (page: number) => `/organisations?${new URLSearchParams({ q: search.q, page: String(page) })}`
  return (
    <>
      <Head
        title="Organisations"
        description="The charities, schools and clubs that hold their draws here, and all the draws of each."
        {...(search.q || search.page > 1 ? {} : { path: '/organisations' })}
      />
      <Title
        title="Organisations"
        lead="The site has looked at each of them before its first draw was public. It vouches for none of them: the promoter of each draw answers for it."
      />
      <Part title="Search">
        <SearchForm action="/organisations" label="Name or place" query={search.q} />
      </Part>
      <Part
        title={search.q ? 'What was found' : 'All organisations'}
        note={<p role="status">{data.total === 0 ? 'None' : countOf(data.total, 'organisation')}</p>}
      >
        {data.items.length === 0 ? (
          <Empty title={search.q ? 'No organisation fits that search.' : 'No organisation is public yet.'}>
            {search.q ? (
              <p>
                Try fewer words. <Link to="/organisations">Show all organisations</Link>
              </p>
            ) : null}
          </Empty>
        ) : (
          <ol className="draw-list">
            {data.items.map((organisation) => (
              <li key={organisation.slug}>
                <div>
                  <h3 className="what">
                    <Link to={`/organisations/${organisation.slug}`}>{organisation.name}</Link>
                  </h3>
                  <p>{organisation.about}</p>
                  {organisation.registration ? (
                    <p className="note mt-0">{organisation.registration}, as they state</p>
                  ) : null}
                </div>
                <div>
                  <p>{organisation.draws === 0 ? 'No draw yet' : countOf(organisation.draws, 'draw')}</p>
                  {organisation.suspended ? <p className="note mt-0">Suspended</p> : null}
                  {organisation.demo ? <p className="note mt-0">A demonstration</p> : null}
                </div>
              </li>
            ))}
          </ol>
        )}
        <Pager page={data.page} pageSize={data.pageSize} total={data.total} href={href} noun="organisations" />
      </Part>
    </>
  )
}
