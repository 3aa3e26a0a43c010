import type { ReactNode } from 'react'
import { Head } from '#src/lib/head.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Page, Title } from '#src/ui/page.tsx'

const MENU = [
  { to: '/draws', text: 'Draws' },
  { to: '/organisations', text: 'Organisations' },
  { to: '/how-it-works', text: 'How it works' },
] as const

interface AccountSheetProps {
  readonly title: string
  readonly description: string
  readonly lead?: ReactNode
  /** Set while the form shows errors: the window's title then says so first. */
  readonly failed?: boolean
  readonly children: ReactNode
}

/** The sheet around signing in, invitations and passwords. Never indexed. */
export function AccountSheet({ title, description, lead, failed = false, children }: AccountSheetProps) {
  return (
    <Page
      menu={MENU}
      footer={
        <p className="measure">
          Only people who run draws sign in. Entrants need no account: their private link is in the mail that they had.
        </p>
      }
    >
      <Head title={failed ? `Error: ${title}` : title} description={description} />
      <Title title={title} lead={lead}>
        <noscript>
          <div className="mt-unit-2">
            <Notice title="This form needs JavaScript">
              <p>Turn it on for this site, or use another browser. Every public page works without it.</p>
            </Notice>
          </div>
        </noscript>
        <div className="mt-unit-3">{children}</div>
      </Title>
    </Page>
  )
}
