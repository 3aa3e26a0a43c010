import { useState } from 'react'
import { useLoaderData, type LoaderFunctionArgs } from 'react-router'
import { changePassword } from '#shared/schemas/api/session.ts'
import { homeOf, requireSession } from '#src/lib/session.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { AccountSheet } from './account-sheet.tsx'
import { NewPasswordField } from './new-password-fields.tsx'

export async function loader(args: LoaderFunctionArgs) {
  const { person } = await requireSession(args)
  return { name: person.name, email: person.email, home: homeOf(person) }
}

export function Component() {
  const { name, email, home } = useLoaderData<typeof loader>()
  const [changes, setChanges] = useState(0)
  const form = useSubmit(changePassword, () => setChanges((count) => count + 1))
  return (
    <AccountSheet
      title="Your account"
      description="Change your password."
      lead={`${name}, ${email}. A new password signs you out everywhere else.`}
      failed={form.failed}
    >
      <form
        key={changes}
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          form.submit({ body: { current: String(data.get('current')), password: String(data.get('password')) } })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        {changes > 0 && !form.failed ? (
          <Notice>
            <p role="status">Your password is changed.</p>
          </Notice>
        ) : null}
        <TextField
          name="current"
          type="password"
          label="Present password"
          autoComplete="current-password"
          error={form.faultOf('current')}
        />
        <NewPasswordField error={form.faultOf('password')} />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Change the password
          </Button>
          <Link to={home}>Back to your work</Link>
        </p>
      </form>
    </AccountSheet>
  )
}
