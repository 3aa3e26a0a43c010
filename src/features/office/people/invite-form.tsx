import { useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import { invitePerson } from '#shared/schemas/api/office.ts'
import type { Role } from '#shared/schemas/values.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { RadioField, TextField } from '#src/ui/field.tsx'
import { Part } from '#src/ui/page.tsx'
import { ROLES } from './role-words.ts'

export function InviteForm({ organisation }: { readonly organisation: string }) {
  const queryClient = useQueryClient()
  const [sent, setSent] = useState<{ readonly count: number; readonly email: string } | null>(null)
  const form = useSubmit(invitePerson, async ({ email }) => {
    setSent((before) => ({ count: (before?.count ?? 0) + 1, email }))
    await queryClient.invalidateQueries({ queryKey: ['office', 'people', organisation] })
  })
  return (
    <Part title="Invite somebody" note="By mail. Each person has a password of their own.">
      <form
        key={sent?.count ?? 0}
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          form.submit({
            params: { organisation },
            body: { email: String(data.get('email')).trim(), role: String(data.get('role')) as Role },
          })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <TextField name="email" type="email" label="E-mail address" autoComplete="off" error={form.faultOf('email')} />
        <RadioField name="role" legend="Role" defaultValue="organiser" error={form.faultOf('role')} options={ROLES} />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Send the invitation
          </Button>
          <span role="status">{sent && !form.failed ? `An invitation is on its way to ${sent.email}.` : ''}</span>
        </p>
      </form>
    </Part>
  )
}
