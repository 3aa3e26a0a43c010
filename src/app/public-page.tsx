import { Outlet, ScrollRestoration } from 'react-router'
import type { ReactNode } from 'react'
import { Link } from '#src/ui/link.tsx'
import { Page, type MenuItem } from '#src/ui/page.tsx'

const MENU: readonly MenuItem[] = [
  { to: '/draws', text: 'Draws' },
  { to: '/organisations', text: 'Organisations' },
  { to: '/how-it-works', text: 'How it works' },
  { to: '/log', text: 'The log' },
]

/** The sheet around every public page. */
export function PublicSheet({ children }: { readonly children: ReactNode }) {
  return (
    <Page menu={MENU} apart={<Link to="/sign-in">Sign in</Link>} footer={<PublicFooter />}>
      {children}
    </Page>
  )
}

export function PublicLayout() {
  return (
    <PublicSheet>
      <Outlet />
      <ScrollRestoration />
    </PublicSheet>
  )
}

function PublicFooter() {
  return (
    <>
      <p className="measure">
        The promoter of each draw answers for it. Evenpenny keeps the list, tosses the coins and publishes the proof. It
        sells no tickets and holds no money.
      </p>
      <p className="measure">
        The figures on these pages may be copied and printed freely.{' '}
        <Link to="/developers">Public files and how to check them</Link>.
      </p>
    </>
  )
}
