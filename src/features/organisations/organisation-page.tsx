import { useSuspenseQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import type { OrganisationPage } from '#shared/schemas/api/public.ts'
import { DrawList } from '#src/features/draws/components/draw-list.tsx'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { countOf } from '#src/ui/format-number.ts'
import { formatDate } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Facts, Part, Title } from '#src/ui/page.tsx'
import { Empty } from '#src/ui/states.tsx'
import { organisationQuery } from './api/get-organisations.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => organisationQuery(api, args.params.slug ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const { slug = '' } = useParams()
  const { data } = useSuspenseQuery(organisationQuery(api, slug))
  return <Organisation organisation={data} />
}

/** One organisation and all its draws. */
export function Organisation({ organisation }: { readonly organisation: OrganisationPage }) {
  return (
    <>
      <Head
        title={organisation.name}
        description={`${organisation.about} All draws of ${organisation.name}, and how each was settled.`}
        path={`/organisations/${organisation.slug}`}
      />
      <link
        rel="alternate"
        type="application/atom+xml"
        title={`Draws of ${organisation.name}`}
        href={`/organisations/${organisation.slug}/feed.atom`}
      />
      <Title title={organisation.name} lead={organisation.about}>
        <Facts
          items={[
            ['Address', organisation.address],
            organisation.registration ? ['Registered', `${organisation.registration}, as they state`] : null,
          ]}
        />
        {organisation.demo || organisation.suspended ? (
          <div className="mt-unit-2">
            {organisation.demo ? (
              <Notice level={2} title="A demonstration">
                <p>This organisation, its people and its draws are invented to show how the site works.</p>
              </Notice>
            ) : null}
            {organisation.suspended ? (
              <Notice level={2} title="Suspended">
                <p>
                  The site has suspended this organisation. It can open nothing new and change nothing. What it has
                  sealed is still drawn, and what is published stays.
                </p>
                {organisation.suspension?.reason ? (
                  <p>
                    Since {formatDate(organisation.suspension.at, 'UTC')}. The site says why: “
                    {organisation.suspension.reason}”
                  </p>
                ) : null}
              </Notice>
            ) : null}
          </div>
        ) : null}
      </Title>
      <Part
        title="Its draws"
        note={organisation.draws.length > 0 ? <p>{countOf(organisation.draws.length, 'draw')}</p> : undefined}
      >
        {organisation.draws.length === 0 ? (
          <Empty title="No draw of this organisation is public yet." />
        ) : (
          <DrawList draws={organisation.draws} ownPage />
        )}
      </Part>
      <Part title="Follow its draws">
        <p className="measure">
          The{' '}
          <Link plain to={`/organisations/${organisation.slug}/feed.atom`}>
            Atom feed
          </Link>{' '}
          tells a feed reader when a draw opens, is sealed, postponed, cancelled or drawn. For print there is the{' '}
          <Link plain to={`/organisations/${organisation.slug}/qr.svg`}>
            QR code of this page
          </Link>
          .
        </p>
      </Part>
    </>
  )
}
