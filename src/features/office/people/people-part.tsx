import { useQueryClient } from '@tanstack/react-query'
import { useEffect, useRef, useState } from 'react'
import { useNavigate } from 'react-router'
import { removePerson, type listPeople } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { Button, TextButton } from '#src/ui/button.tsx'
import { DataTable, type Column } from '#src/ui/data-table.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { capitalise, countOf } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'

type Person = ResponseOf<typeof listPeople>['people'][number]

interface PeoplePartProps {
  readonly organisation: string
  /** The organisation's name. */
  readonly name: string
  readonly people: readonly Person[]
  /** Who is signed in. */
  readonly me: string | null
  readonly zone: string
  readonly mayChange: boolean
}

export function PeoplePart({ organisation, name, people, me, zone, mayChange }: PeoplePartProps) {
  const [asked, setAsked] = useState<string | null>(null)
  const [words, setWords] = useState('')
  const remove: Column<Person> = {
    key: 'remove',
    head: <span className="vh">Remove</span>,
    cell: (person) => (
      <TextButton
        id={`remove-${person.id}`}
        aria-expanded={asked === person.id}
        aria-label={`Remove ${person.name}`}
        onClick={() => setAsked(asked === person.id ? null : person.id)}
      >
        Remove
      </TextButton>
    ),
  }
  return (
    <Part title={people.length === 1 ? 'One person' : countOf(people.length, 'person', 'people')}>
      <DataTable
        dense
        rows={people}
        rowKey={(person) => person.id}
        detail={(person) =>
          asked === person.id ? (
            <Confirmation
              organisation={organisation}
              organisationName={name}
              person={person}
              itsMe={person.id === me}
              onKeep={() => {
                setAsked(null)
                document.getElementById(`remove-${person.id}`)?.focus()
              }}
              onDone={() => {
                setAsked(null)
                setWords(`${person.name} is removed.`)
              }}
            />
          ) : null
        }
        columns={[
          {
            key: 'name',
            head: 'Name',
            rowHead: true,
            cell: (person) => (person.id === me ? `${person.name} (you)` : person.name),
          },
          { key: 'email', head: 'E-mail', cell: (person) => person.email },
          { key: 'role', head: 'Role', cell: (person) => capitalise(person.role) },
          { key: 'since', head: 'Since', cell: (person) => <Time at={person.since} timeZone={zone} as="date" /> },
          ...(mayChange ? [remove] : []),
        ]}
      />
      <Announcer words={words} />
    </Part>
  )
}

interface ConfirmationProps {
  readonly organisation: string
  readonly organisationName: string
  readonly person: Person
  readonly itsMe: boolean
  readonly onKeep: () => void
  readonly onDone: () => void
}

/** What removing means, before it is done. */
function Confirmation({ organisation, organisationName, person, itsMe, onKeep, onDone }: ConfirmationProps) {
  const queryClient = useQueryClient()
  const navigate = useNavigate()
  const box = useRef<HTMLDivElement>(null)
  const form = useSubmit(removePerson, async () => {
    if (itsMe) {
      queryClient.clear()
      await navigate('/sign-in')
      return
    }
    await queryClient.invalidateQueries({ queryKey: ['office', 'people', organisation] })
    onDone()
  })
  useEffect(() => {
    box.current?.focus()
  }, [])
  return (
    <div className="panel-form" tabIndex={-1} ref={box} role="group" aria-labelledby="remove-title">
      {form.failed ? (
        <div className="mb-unit-2">
          <ErrorSummary title="Nobody was removed" detail={form.detail} errors={form.faults} />
        </div>
      ) : null}
      <h3 id="remove-title">
        {itsMe ? `Leave ${organisationName}?` : `Remove ${person.name} from ${organisationName}?`}
      </h3>
      <p className="measure mt-unit">
        {itsMe
          ? 'You are signed out everywhere at once and can no longer open this office. Only another promoter can invite you again.'
          : 'They are signed out everywhere at once and can no longer open this office. What they did stays in the audit trail under their name. You can invite them again.'}
      </p>
      <p className="buttons mt-unit-2">
        <Button danger busy={form.busy} onClick={() => form.submit({ params: { organisation, person: person.id } })}>
          {itsMe ? 'Leave' : 'Remove'}
        </Button>
        <Button quiet onClick={onKeep}>
          {itsMe ? 'Stay' : 'Keep'}
        </Button>
      </p>
    </div>
  )
}
