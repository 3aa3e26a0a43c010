import type { ReactNode } from 'react'
import { useSignOut } from '#src/lib/use-sign-out.ts'
import { TextButton } from '#src/ui/button.tsx'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Page, type MenuItem } from '#src/ui/page.tsx'

interface OfficeSheetProps {
  readonly menu: readonly MenuItem[]
  readonly name: string
  readonly role: string | null
  readonly banner?: ReactNode
  readonly children: ReactNode
}

/** The sheet around the office's pages: who is signed in, and as what. */
export function OfficeSheet({ menu, name, role, banner, children }: OfficeSheetProps) {
  const { busy, signOut } = useSignOut()
  return (
    <Page
      className="office"
      menu={menu}
      apart={
        <>
          <Link to="/account">{name}</Link>
          {role ? `, ${role}.` : '.'}{' '}
          <TextButton onClick={signOut} aria-disabled={busy || undefined}>
            Sign out
          </TextButton>
        </>
      }
      banner={
        <>
          {banner}
          <noscript>
            <div className="row">
              <div className="stub" />
              <div className="body pb-unit-2">
                <Notice title="The office needs JavaScript">
                  <p>Turn it on for this site, or use another browser. Every public page works without it.</p>
                </Notice>
              </div>
            </div>
          </noscript>
        </>
      }
      footer={
        <p className="measure">
          A draw with paid tickets is a lottery in many places: it may need a registration or a licence. Evenpenny keeps
          your answers and decides nothing for you; ask your local authority, or somebody licensed to advise.
        </p>
      }
    >
      {children}
    </Page>
  )
}
