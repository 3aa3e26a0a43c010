import { useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import { revokeInvitation, type listPeople } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { TextButton } from '#src/ui/button.tsx'
import { DataTable, type Column } from '#src/ui/data-table.tsx'
import { capitalise } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'

type Invitation = ResponseOf<typeof listPeople>['invitations'][number]

interface InvitationsPartProps {
  readonly organisation: string
  readonly invitations: readonly Invitation[]
  readonly zone: string
  readonly mayChange: boolean
}

/** Invitations that nobody has accepted yet. */
export function InvitationsPart({ organisation, invitations, zone, mayChange }: InvitationsPartProps) {
  const [words, setWords] = useState('')
  const takeBack: Column<Invitation> = {
    key: 'back',
    head: <span className="vh">Take back</span>,
    cell: (invitation) => (
      <TakeBack
        organisation={organisation}
        invitation={invitation}
        onDone={() => setWords(`The invitation to ${invitation.email} is taken back.`)}
      />
    ),
  }
  return (
    <Part title="Open invitations">
      {invitations.length === 0 ? (
        <p>None is waiting for an answer.</p>
      ) : (
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
            ...(mayChange ? [takeBack] : []),
          ]}
        />
      )}
      <Announcer words={words} />
    </Part>
  )
}

interface TakeBackProps {
  readonly organisation: string
  readonly invitation: Invitation
  readonly onDone: () => void
}

function TakeBack({ organisation, invitation, onDone }: TakeBackProps) {
  const queryClient = useQueryClient()
  const form = useSubmit(revokeInvitation, async () => {
    await queryClient.invalidateQueries({ queryKey: ['office', 'people', organisation] })
    onDone()
  })
  return (
    <>
      <TextButton
        aria-label={`Take back the invitation to ${invitation.email}`}
        aria-disabled={form.busy || undefined}
        onClick={() => form.submit({ params: { organisation, invitation: invitation.id } })}
      >
        Take back
      </TextButton>
      {form.detail ? (
        <span className="fault block" role="alert">
          {form.detail}
        </span>
      ) : null}
    </>
  )
}
