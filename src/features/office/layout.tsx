import { data, Outlet, ScrollRestoration, useLoaderData, type LoaderFunctionArgs } from 'react-router'
import { requireSession } from '#src/lib/session.ts'
import { Notice } from '#src/ui/notice.tsx'
import { OfficeSheet } from './office-sheet.tsx'
import { drawsPath, peoplePath } from './paths.ts'

export async function loader(args: LoaderFunctionArgs) {
  const { person } = await requireSession(args)
  const membership = person.memberships.find(({ organisation }) => organisation.slug === args.params.organisation)
  if (!membership) {
    throw data(
      {
        type: 'about:blank',
        title: 'Not your office',
        status: 403,
        detail: 'You have no role in this organisation. If you should have one, ask its promoter to invite you.',
      },
      { status: 403 },
    )
  }
  return { name: person.name, role: membership.role, organisation: membership.organisation }
}

export function Component() {
  const { name, role, organisation } = useLoaderData<typeof loader>()
  const menu = [
    { to: drawsPath(organisation.slug), text: 'Draws', end: true },
    ...(role === 'witness' ? [] : [{ to: peoplePath(organisation.slug), text: 'People' }]),
    { to: `/organisations/${organisation.slug}`, text: 'Public page' },
  ]
  return (
    <OfficeSheet
      menu={menu}
      name={name}
      role={role}
      banner={organisation.state === 'approved' ? null : <StateBanner state={organisation.state} />}
    >
      <Outlet />
      <ScrollRestoration />
    </OfficeSheet>
  )
}

function StateBanner({ state }: { readonly state: string }) {
  return (
    <div className="row">
      <div className="stub" />
      <div className="body pb-unit-3">
        {state === 'suspended' ? (
          <Notice title="Your organisation is suspended">
            <p>
              Nothing can be changed, and drafts are hidden. What was sealed is still drawn, and public pages stay.
              Write to the administrator of the site.
            </p>
          </Notice>
        ) : (
          <Notice title="Your organisation waits for approval">
            <p>You can prepare drafts. The administrator of the site looks at it before a draw can open.</p>
          </Notice>
        )}
      </div>
    </div>
  )
}
