import { data, Outlet, ScrollRestoration, useLoaderData, type LoaderFunctionArgs } from 'react-router'
import { requireSession } from '#src/lib/session.ts'
import { useSignOut } from '#src/lib/use-sign-out.ts'
import { TextButton } from '#src/ui/button.tsx'
import { Link } from '#src/ui/link.tsx'
import { Page } from '#src/ui/page.tsx'

const MENU = [
  { to: '/admin', text: 'State', end: true },
  { to: '/admin/organisations', text: 'Organisations' },
  { to: '/admin/audit', text: 'Audit trail' },
] as const

export async function loader(args: LoaderFunctionArgs) {
  const { person } = await requireSession(args)
  if (!person.administrator) {
    throw data(
      {
        type: 'about:blank',
        title: 'Only for administrators',
        status: 403,
        detail: 'These pages are for the administrators of the site. Your own work is in the office.',
      },
      { status: 403 },
    )
  }
  return { name: person.name }
}

export function Component() {
  const { name } = useLoaderData<typeof loader>()
  const { busy, signOut } = useSignOut()
  return (
    <Page
      className="office"
      menu={MENU}
      apart={
        <>
          <Link to="/account">{name}</Link>, administrator.{' '}
          <TextButton onClick={signOut} aria-disabled={busy || undefined}>
            Sign out
          </TextButton>
        </>
      }
      footer={
        <p className="measure">
          An administrator approves and suspends organisations and helps people back in. Nobody here can touch a sealed
          list or a result, and entrants are not shown.
        </p>
      }
    >
      <Outlet />
      <ScrollRestoration />
    </Page>
  )
}
