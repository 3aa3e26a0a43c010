import { useQueryClient } from '@tanstack/react-query'
import { useLoaderData, useNavigate, type LoaderFunctionArgs } from 'react-router'
import { acceptInvitation, getInvitation } from '#shared/schemas/api/session.ts'
import { load } from '#src/lib/loading.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { AccountSheet } from './account-sheet.tsx'
import { NewPasswordField } from './new-password-fields.tsx'

const MAY: Record<string, string> = {
  promoter: 'A promoter answers for its draws: opens, seals, postpones and cancels them, and manages its people.',
  organiser: 'An organiser sets up draws, gathers entrants and prepares the seal.',
  witness:
    'A witness sees and confirms the seal and the result of a draw, or refuses with words that the public reads.',
}

export async function loader(args: LoaderFunctionArgs) {
  const token = args.params.token ?? ''
  const invitation = await load(args, (api) => ({
    queryKey: ['invitation', token],
    queryFn: () => api.call(getInvitation, { params: { token } }),
  }))
  return { token, invitation }
}

export function Component() {
  const { token, invitation } = useLoaderData<typeof loader>()
  const navigate = useNavigate()
  const queryClient = useQueryClient()
  const form = useSubmit(acceptInvitation, async (session) => {
    queryClient.clear()
    queryClient.setQueryData(['session'], session)
    await navigate('/office')
  })
  return (
    <AccountSheet
      title="You are invited"
      description="Accept an invitation to an organisation."
      lead={`${invitation.invitedBy} invites ${invitation.email} to ${invitation.organisation}, as ${invitation.role}.`}
      failed={form.failed}
    >
      <p className="measure mb-unit-2">{MAY[invitation.role]}</p>
      <form
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          const password = String(data.get('password'))
          form.submit({
            params: { token },
            body: invitation.knownPerson ? { password } : { name: String(data.get('name')), password },
          })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        {invitation.knownPerson ? (
          <TextField
            name="password"
            type="password"
            label="Your password"
            hint="This address has an account already."
            autoComplete="current-password"
            error={form.faultOf('password')}
          />
        ) : (
          <>
            <TextField name="name" label="Your name" autoComplete="name" error={form.faultOf('name')} />
            <NewPasswordField error={form.faultOf('password')} />
          </>
        )}
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Accept
          </Button>
        </p>
      </form>
    </AccountSheet>
  )
}
