import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import { updateOrganisation } from '#shared/schemas/api/administrator.ts'
import type { OrganisationRow } from '#shared/schemas/api/administrator.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf, useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { Link } from '#src/ui/link.tsx'
import { Facts, Part, Title } from '#src/ui/page.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { organisationQuery } from './api/queries.ts'
import { OrganisationFields, organisationFrom } from './organisation-fields.tsx'
import { OrganisationPeople } from './organisation-people.tsx'
import { OrganisationState } from './organisation-state.tsx'
import { STATE_WORDS } from './organisation-words.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => organisationQuery(api, args.params.organisation ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const slug = useParams().organisation ?? ''
  const { data, error, refetch } = useQuery(organisationQuery(api, slug))
  if (!data) {
    return (
      <Title title="Organisation">
        {error ? (
          <Failure title="It could not be read" detail={detailsOf(error).detail} onRetry={() => void refetch()} />
        ) : (
          <Skeleton />
        )}
      </Title>
    )
  }
  const { organisation, people, invitations } = data
  return (
    <>
      <Head title={organisation.name} description="People, invitations, counts and state." />
      <Title
        above={<Link to="/admin/organisations">Organisations</Link>}
        title={organisation.name}
        stub={<p className="stub-facts mt-0">{STATE_WORDS[organisation.state]}</p>}
      >
        <Facts
          items={[
            ['Registration', organisation.registration ?? 'None'],
            ['Address', organisation.address],
            ['Draws', drawCounts(organisation)],
            [
              'Public page',
              <Link key="page" to={`/organisations/${organisation.slug}`}>
                /organisations/{organisation.slug}
              </Link>,
            ],
            [
              'Its audit trail',
              <Link key="audit" to={`/admin/audit?organisation=${organisation.slug}`}>
                Who changed what
              </Link>,
            ],
          ]}
        />
      </Title>
      <OrganisationState organisation={organisation} />
      <OrganisationPeople
        slug={organisation.slug}
        people={people}
        invitations={invitations}
        zone={organisation.timeZone}
      />
      <Particulars organisation={organisation} />
    </>
  )
}

function drawCounts({ draws }: OrganisationRow): string {
  const counts = Object.entries(draws).filter(([, count]) => count > 0)
  if (counts.length === 0) return 'None yet'
  return counts.map(([state, count]) => `${count} ${state}`).join(', ')
}

function Particulars({ organisation }: { readonly organisation: OrganisationRow }) {
  const queryClient = useQueryClient()
  const [saved, setSaved] = useState(false)
  const form = useSubmit(updateOrganisation, async () => {
    setSaved(true)
    await queryClient.invalidateQueries({ queryKey: ['administrator'] })
  })
  return (
    <Part title="Particulars" note="A new name shows on its pages at once. What its seals have fixed stays as sealed.">
      <form
        className="form narrow-form"
        method="post"
        noValidate
        onChange={() => setSaved(false)}
        onSubmit={(event) => {
          event.preventDefault()
          setSaved(false)
          form.submit({
            params: { organisation: organisation.slug },
            body: { ...organisationFrom(new FormData(event.currentTarget)), version: organisation.version },
          })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <OrganisationFields values={organisation} faultOf={form.faultOf} />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Save
          </Button>
          <span role="status">{saved && !form.failed ? 'Saved.' : ''}</span>
        </p>
      </form>
    </Part>
  )
}
