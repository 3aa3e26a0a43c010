import { useQuery } from '@tanstack/react-query'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { DataTable } from '#src/ui/data-table.tsx'
import { SelectField } from '#src/ui/field.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Pager } from '#src/ui/pager.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Empty, Failure, Skeleton } from '#src/ui/states.tsx'
import { organisationSearchFrom, organisationsQuery } from './api/queries.ts'
import { STATE_WORDS } from './organisation-words.ts'

export async function loader(args: LoaderFunctionArgs) {
  const search = organisationSearchFrom(new URL(args.request.url).searchParams)
  await load(args, (api) => organisationsQuery(api, search))
  return null
}

export function Component() {
  const { api } = useApp()
  const [params] = useSearchParams()
  const search = organisationSearchFrom(params)
  const { data, error, refetch } = useQuery(organisationsQuery(api, search))
  const href = (page: number) => {
    const next = new URLSearchParams()
    if (search.q) next.set('q', search.q)
    if (search.state !== 'all') next.set('state', search.state)
    if (page > 1) next.set('page', String(page))
    return `/admin/organisations${next.size > 0 ? `?${next}` : ''}`
  }
  return (
    <>
      <Head title="Organisations" description="Every organisation, with counts and states." />
      <Title title="Organisations" lead={data ? `${countOf(data.total, 'organisation')} found.` : undefined}>
        <p className="buttons mt-unit">
          <ButtonLink to="/admin/organisations/new">Make an organisation</ButtonLink>
        </p>
      </Title>
      <Part title="Find one">
        <SearchForm action="/admin/organisations" label="Name or registration" query={search.q}>
          <SelectField
            name="state"
            label="State"
            defaultValue={search.state}
            key={search.state}
            fieldClass="narrow"
            options={[
              { value: 'all', text: 'Any state' },
              { value: 'pending', text: 'Waiting for approval' },
              { value: 'approved', text: 'Approved' },
              { value: 'suspended', text: 'Suspended' },
            ]}
          />
        </SearchForm>
        <div className="mt-unit-2">
          {data === undefined ? (
            error ? (
              <Failure
                title="The list could not be read"
                detail={detailsOf(error).detail}
                onRetry={() => void refetch()}
              />
            ) : (
              <Skeleton label="Reading the organisations" />
            )
          ) : data.items.length === 0 ? (
            <Empty title="No organisation fits.">
              <p>Search for a part of the name, or in any state.</p>
            </Empty>
          ) : (
            <DataTable
              dense
              rows={data.items}
              rowKey={(row) => row.id}
              columns={[
                {
                  key: 'name',
                  head: 'Name',
                  rowHead: true,
                  cell: (row) => <Link to={`/admin/organisations/${row.slug}`}>{row.name}</Link>,
                },
                { key: 'state', head: 'State', cell: (row) => STATE_WORDS[row.state] },
                { key: 'registration', head: 'Registration', cell: (row) => row.registration ?? 'None' },
                { key: 'people', head: 'People', numeric: true, cell: (row) => formatNumber(row.people) },
                {
                  key: 'draws',
                  head: 'Draws',
                  numeric: true,
                  cell: (row) => formatNumber(Object.values(row.draws).reduce((sum, count) => sum + count, 0)),
                },
              ]}
            />
          )}
          {data ? (
            <Pager page={data.page} pageSize={data.pageSize} total={data.total} href={href} noun="organisations" />
          ) : null}
        </div>
      </Part>
    </>
  )
}
