import { redirect, useLoaderData, type LoaderFunctionArgs } from 'react-router'
import { Head } from '#src/lib/head.tsx'
import { requireSession } from '#src/lib/session.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Empty } from '#src/ui/states.tsx'
import { OfficeSheet } from './office-sheet.tsx'
import { drawsPath } from './paths.ts'

export async function loader(args: LoaderFunctionArgs) {
  const { person } = await requireSession(args)
  const [only, ...others] = person.memberships
  if (only && others.length === 0) throw redirect(drawsPath(only.organisation.slug))
  return { name: person.name, memberships: person.memberships, administrator: person.administrator }
}

export function Component() {
  const { name, memberships, administrator } = useLoaderData<typeof loader>()
  return (
    <OfficeSheet menu={[]} name={name} role={null}>
      <Head title="Office" description="Choose an organisation." />
      <Title
        title="Office"
        lead={memberships.length > 0 ? 'Choose the organisation that you work for now.' : undefined}
      />
      <Part title="Organisations">
        {memberships.length === 0 ? (
          <Empty title="You have no role in any organisation.">
            <p>
              {administrator ? (
                <>
                  Administrators hold none. <Link to="/admin">Go to the administrator&rsquo;s pages</Link>.
                </>
              ) : (
                'Ask its promoter to invite you again.'
              )}
            </p>
          </Empty>
        ) : (
          <ul className="draw-list">
            {memberships.map(({ organisation, role }) => (
              <li key={`${organisation.slug} ${role}`}>
                <p className="what">
                  <Link to={drawsPath(organisation.slug)}>{organisation.name}</Link>
                </p>
                <p className="note">as {role}</p>
              </li>
            ))}
          </ul>
        )}
      </Part>
    </OfficeSheet>
  )
}
