import { useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import {
  inviteForAdministrator,
  sendPasswordReset,
  type getOrganisationForAdministrator,
} from '#shared/schemas/api/administrator.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Role } from '#shared/schemas/values.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button, TextButton } from '#src/ui/button.tsx'
import { DataTable } from '#src/ui/data-table.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { SelectField, TextField } from '#src/ui/field.tsx'
import { capitalise } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'

type Answer = ResponseOf<typeof getOrganisationForAdministrator>

interface OrganisationPeopleProps {
  readonly slug: string
  readonly zone: string
  readonly people: Answer['people']
  readonly invitations: Answer['invitations']
}

export function OrganisationPeople({ slug, zone, people, invitations }: OrganisationPeopleProps) {
  return (
    <Part title="People" note="Promoters bring in and remove people themselves. Here they are helped back in.">
      {people.length === 0 ? (
        <p>Nobody has accepted an invitation yet.</p>
      ) : (
        <DataTable
          dense
          rows={people}
          rowKey={(person) => `${person.id} ${person.role}`}
          columns={[
            { key: 'name', head: 'Name', rowHead: true, cell: (person) => person.name },
            { key: 'email', head: 'E-mail', cell: (person) => person.email },
            { key: 'role', head: 'Role', cell: (person) => capitalise(person.role) },
            { key: 'since', head: 'Since', cell: (person) => <Time at={person.since} timeZone={zone} as="date" /> },
            { key: 'help', head: 'Help', cell: (person) => <ResetButton person={person.id} name={person.name} /> },
          ]}
        />
      )}
      {invitations.length > 0 ? (
        <>
          <h3 className="mt-unit-3 mb-unit">Open invitations</h3>
          <DataTable
            dense
            rows={invitations}
            rowKey={(invitation) => invitation.id}
            columns={[
              { key: 'email', head: 'E-mail', rowHead: true, cell: (invitation) => invitation.email },
              { key: 'role', head: 'Role', cell: (invitation) => capitalise(invitation.role) },
              { key: 'by', head: 'Invited by', cell: (invitation) => invitation.invitedBy },
              {
                key: 'expires',
                head: 'Works until',
                cell: (invitation) => <Time at={invitation.expiresAt} timeZone={zone} />,
              },
            ]}
          />
        </>
      ) : null}
      <Invite slug={slug} />
    </Part>
  )
}

function ResetButton({ person, name }: { readonly person: string; readonly name: string }) {
  const [sent, setSent] = useState(false)
  const form = useSubmit(sendPasswordReset, () => setSent(true))
  if (sent) return <span role="status">A link is on its way.</span>
  return (
    <>
      <TextButton
        aria-disabled={form.busy || undefined}
        aria-label={`Send ${name} a link to set a new password`}
        onClick={() => form.submit({ params: { person } })}
      >
        Send a new-password link
      </TextButton>
      {form.detail ? (
        <span className="fault" role="alert">
          {form.detail}
        </span>
      ) : null}
    </>
  )
}

function Invite({ slug }: { readonly slug: string }) {
  const queryClient = useQueryClient()
  const [sent, setSent] = useState<string | null>(null)
  const form = useSubmit(inviteForAdministrator, async (invitation) => {
    setSent(invitation.email)
    await queryClient.invalidateQueries({ queryKey: ['administrator', 'organisation', slug] })
  })
  return (
    <>
      <h3 className="mt-unit-3 mb-unit">Invite somebody</h3>
      <form
        key={sent}
        className="form narrow-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          form.submit({
            params: { organisation: slug },
            body: { email: String(data.get('email')).trim(), role: String(data.get('role')) as Role },
          })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <TextField name="email" type="email" label="E-mail address" error={form.faultOf('email')} />
        <SelectField
          name="role"
          label="Role"
          error={form.faultOf('role')}
          options={[
            { value: 'promoter', text: 'Promoter' },
            { value: 'organiser', text: 'Organiser' },
            { value: 'witness', text: 'Witness' },
          ]}
        />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Send the invitation
          </Button>
          <span role="status">{sent !== null && !form.failed ? `An invitation is on its way to ${sent}.` : ''}</span>
        </p>
      </form>
    </>
  )
}
