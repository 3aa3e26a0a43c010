import { useState } from 'react'
import { requestPasswordReset } from '#shared/schemas/api/session.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { AccountSheet } from './account-sheet.tsx'

export function Component() {
  const [asked, setAsked] = useState<string | null>(null)
  const form = useSubmit(requestPasswordReset, (_, input) => setAsked(input.body?.email ?? ''))
  return (
    <AccountSheet
      title="Set a new password"
      description="Ask for a link by which a new password can be set."
      lead="Type the address with which you sign in. If it belongs to an account, a link goes there by mail."
      failed={form.failed}
    >
      {asked !== null ? (
        <Notice title="Look into your mail">
          <p role="status">
            If {asked} belongs to an account, a link is on its way. It works once, within the next hour. Nothing has
            changed until you use it.
          </p>
        </Notice>
      ) : (
        <form
          className="form narrow-form"
          method="post"
          noValidate
          onSubmit={(event) => {
            event.preventDefault()
            const data = new FormData(event.currentTarget)
            form.submit({ body: { email: String(data.get('email')).trim() } })
          }}
        >
          {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
          <TextField
            name="email"
            type="email"
            label="E-mail address"
            autoComplete="username"
            error={form.faultOf('email')}
          />
          <p className="buttons">
            <Button type="submit" busy={form.busy}>
              Send me the link
            </Button>
          </p>
        </form>
      )}
    </AccountSheet>
  )
}
