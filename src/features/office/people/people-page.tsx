import { useQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { sessionQuery } from '#src/lib/session.ts'
import { detailsOf } from '#src/lib/use-submit.ts'
import { Title } from '#src/ui/page.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { peopleQuery } from '../api/queries.ts'
import { InviteForm } from './invite-form.tsx'
import { InvitationsPart } from './invitations-part.tsx'
import { PeoplePart } from './people-part.tsx'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => peopleQuery(api, args.params.organisation ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const slug = useParams().organisation ?? ''
  const { data, error, refetch } = useQuery(peopleQuery(api, slug))
  const session = useQuery(sessionQuery(api)).data
  if (!data) {
    return (
      <Title title="People">
        {error ? (
          <Failure
            title="The people could not be read"
            detail={detailsOf(error).detail}
            onRetry={() => void refetch()}
          />
        ) : (
          <Skeleton label="Reading the people" />
        )}
      </Title>
    )
  }
  const zone =
    session?.person?.memberships.find(({ organisation }) => organisation.slug === slug)?.organisation.timeZone ?? 'UTC'
  const { organisation, people, invitations, may } = data
  return (
    <>
      <Head title={`People: ${organisation.name}`} description="Who works for this organisation, and as what." />
      <Title
        above={organisation.name}
        title="People"
        lead={
          may.change
            ? 'Who works for this organisation. No two people share a password: invite each of them.'
            : 'Who works for this organisation. A promoter invites and removes people.'
        }
      />
      <PeoplePart
        organisation={slug}
        name={organisation.name}
        people={people}
        me={session?.person?.id ?? null}
        zone={zone}
        mayChange={may.change}
      />
      <InvitationsPart organisation={slug} invitations={invitations} zone={zone} mayChange={may.change} />
      {may.change ? <InviteForm organisation={slug} /> : null}
    </>
  )
}
