import { useQueryClient } from '@tanstack/react-query'
import { useLoaderData, useNavigate, type LoaderFunctionArgs } from 'react-router'
import { getPasswordReset, resetPassword } from '#shared/schemas/api/session.ts'
import { load } from '#src/lib/loading.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { AccountSheet } from './account-sheet.tsx'
import { NewPasswordField } from './new-password-fields.tsx'

export async function loader(args: LoaderFunctionArgs) {
  const token = args.params.token ?? ''
  const reset = await load(args, (api) => ({
    queryKey: ['password-reset', token],
    queryFn: () => api.call(getPasswordReset, { params: { token } }),
  }))
  return { token, email: reset.email }
}

export function Component() {
  const { token, email } = useLoaderData<typeof loader>()
  const navigate = useNavigate()
  const queryClient = useQueryClient()
  const form = useSubmit(resetPassword, async () => {
    queryClient.clear()
    await navigate('/sign-in?done=password')
  })
  return (
    <AccountSheet
      title="Set a new password"
      description="Set a new password."
      lead={`For ${email}. Wherever this account is signed in now, it is signed out.`}
      failed={form.failed}
    >
      <form
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          form.submit({ params: { token }, body: { password: String(data.get('password')) } })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <input type="hidden" name="username" value={email} autoComplete="username" readOnly />
        <NewPasswordField error={form.faultOf('password')} />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Set the password
          </Button>
        </p>
      </form>
    </AccountSheet>
  )
}
