import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useEffect, useRef, useState } from 'react'
import { removeEntrant, updateEntrant, type EntrantRow } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextArea } from '#src/ui/field.tsx'
import { capitalise, countOf } from '#src/ui/format-number.ts'
import { Notice } from '#src/ui/notice.tsx'
import { Facts } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'
import { entrantsQuery } from '../api/queries.ts'
import { EntrantAccess } from './entrant-access.tsx'
import { EntrantFields, entrantFrom, typedOver } from './entrant-fields.tsx'

interface EntrantPanelProps {
  readonly draw: string
  readonly timeZone: string
  readonly row: EntrantRow
  readonly mayChange: boolean
  /** Whether whoever reads may have links sent and slips printed. */
  readonly mayWrite: boolean
  /** Set when something else was asked for while words typed here are not saved. */
  readonly held: boolean
  readonly onTyped: (typed: boolean) => void
  /** With what was done, for those who hear the page; empty where nothing was. */
  readonly onClose: (words: string) => void
}

/** What an entrant chose on their private page: a label typed here waits behind it. */
const CHOSEN = {
  initials: 'Chose on their private page to be announced by initials: that stands, whatever is typed above.',
  code: 'Chose on their private page to be announced by their code alone: that stands, whatever is typed above.',
} as const

/** One entrant whole, under their row: read, change, take out. */
export function EntrantPanel({ draw, timeZone, row, mayChange, mayWrite, held, onTyped, onClose }: EntrantPanelProps) {
  const [takingOut, setTakingOut] = useState(false)
  return (
    <div className="panel-form">
      {held ? (
        <div role="alert" className="mb-unit-2">
          <Notice title="What you typed here is not saved">
            <p>Save it or cancel first.</p>
          </Notice>
        </div>
      ) : null}
      {mayChange ? null : (
        <Facts
          exact
          items={[
            ['Name', row.name],
            ['Announced as', row.label],
            ['E-mail address', row.email ?? 'None'],
            ['Telephone', row.phone ?? 'None'],
            ['Ticket numbers', row.numbers ?? 'None'],
          ]}
        />
      )}
      {mayChange ? (
        <ChangeForm
          draw={draw}
          opened={row}
          hidden={takingOut}
          onTyped={onTyped}
          onClose={onClose}
          onTakeOut={() => setTakingOut(true)}
        />
      ) : null}
      {takingOut ? (
        <TakeOutForm draw={draw} row={row} onKeep={() => setTakingOut(false)} onDone={onClose} />
      ) : (
        <p className="note mt-unit-2">
          Code {row.code}. {capitalise(row.source)}, <Time at={row.addedAt} timeZone={timeZone} />.
          {row.announced === 'label' ? null : ` ${CHOSEN[row.announced]}`}
        </p>
      )}
      {takingOut ? null : <EntrantAccess draw={draw} row={row} mayWrite={mayWrite} />}
      {mayChange ? null : (
        <p className="mt-unit">
          <Button small quiet onClick={() => onClose('')}>
            Close
          </Button>
        </p>
      )}
    </div>
  )
}

interface ChangeFormProps {
  readonly draw: string
  readonly opened: EntrantRow
  readonly hidden: boolean
  readonly onTyped: (typed: boolean) => void
  readonly onClose: (words: string) => void
  readonly onTakeOut: () => void
}

function ChangeForm({ draw, opened, hidden, onTyped, onClose, onTakeOut }: ChangeFormProps) {
  const { api } = useApp()
  const queryClient = useQueryClient()
  // What the fields were filled from. It moves on only when asked to: nothing typed is ever overwritten.
  const [base, setBase] = useState(opened)
  const box = useRef<HTMLFormElement>(null)
  const form = useSubmit(updateEntrant, async (saved) => {
    await queryClient.invalidateQueries({ queryKey: ['office', 'draw', draw] })
    onClose(`Saved: ${saved.name}, ${countOf(saved.tickets, 'ticket')}.`)
  })
  const now = useQuery({
    ...entrantsQuery(api, draw, { q: opened.code, sort: 'code', direction: 'up', page: 1 }),
    enabled: form.changed,
    staleTime: 0,
  })
  const current = form.changed ? now.data?.items.find(({ id }) => id === opened.id) : undefined
  useEffect(() => {
    box.current?.querySelector<HTMLInputElement>('#name')?.focus()
  }, [base])
  /** With `over`, what was not typed here stays as the other person left it. */
  const send = (over?: EntrantRow) => {
    if (!box.current) return
    const values = entrantFrom(new FormData(box.current))
    form.submit({
      params: { draw, entrant: opened.id },
      body: { ...(over ? typedOver(over, base, values) : values), version: (over ?? base).version },
    })
  }
  return (
    <form
      key={base.version}
      ref={box}
      className="form"
      method="post"
      noValidate
      hidden={hidden}
      aria-label={`Change ${opened.name}`}
      onChange={() => onTyped(true)}
      onSubmit={(event) => {
        event.preventDefault()
        send()
      }}
    >
      {form.failed ? (
        <ErrorSummary
          {...(form.changed ? { title: 'Somebody changed this entrant meanwhile' } : {})}
          detail={form.changed ? 'What you typed is still here, and not saved.' : form.detail}
          errors={form.faults}
        />
      ) : null}
      {current ? (
        <div>
          <p>In the list now: {changedWords(base, current)}.</p>
          <p className="buttons mt-unit">
            <Button small onClick={() => send(current)}>
              Save what I typed over it
            </Button>
            <Button
              small
              quiet
              onClick={() => {
                form.reset()
                onTyped(false)
                setBase(current)
              }}
            >
              Show what is there now
            </Button>
          </p>
        </div>
      ) : null}
      {form.changed && now.isSuccess && !now.isFetching && !current ? (
        <p>This entrant is no longer in the list.</p>
      ) : null}
      <EntrantFields values={base} faultOf={form.faultOf} />
      <p className="buttons">
        <Button type="submit" busy={form.busy}>
          Save
        </Button>
        <Button quiet onClick={() => onClose('')}>
          Cancel
        </Button>
        <Button
          quiet
          onClick={() => {
            form.reset()
            onTakeOut()
          }}
        >
          Take out of the list
        </Button>
      </p>
    </form>
  )
}

const SHOWN = [
  ['name', 'name'],
  ['tickets', 'tickets'],
  ['label', 'announced as'],
  ['email', 'e-mail address'],
  ['phone', 'telephone'],
  ['numbers', 'ticket numbers'],
] as const

/** What another person changed, as `tickets 7 (were 5)`. */
function changedWords(before: EntrantRow, now: EntrantRow): string {
  const changed = SHOWN.filter(([field]) => before[field] !== now[field])
  if (changed.length === 0) return 'the same as when you opened it'
  return changed
    .map(([field, word]) => `${word} ${now[field] ?? 'none'} (before: ${before[field] ?? 'none'})`)
    .join('; ')
}

interface TakeOutFormProps {
  readonly draw: string
  readonly row: EntrantRow
  readonly onKeep: () => void
  readonly onDone: (words: string) => void
}

function TakeOutForm({ draw, row, onKeep, onDone }: TakeOutFormProps) {
  const queryClient = useQueryClient()
  const form = useSubmit(removeEntrant, async () => {
    await queryClient.invalidateQueries({ queryKey: ['office', 'draw', draw] })
    onDone(`Taken out: ${row.name}, ${countOf(row.tickets, 'ticket')}.`)
  })
  const box = useRef<HTMLFormElement>(null)
  useEffect(() => {
    box.current?.querySelector<HTMLTextAreaElement>('#reason')?.focus()
  }, [])
  return (
    <form
      ref={box}
      className="form"
      method="post"
      noValidate
      aria-labelledby="take-out-title"
      onSubmit={(event) => {
        event.preventDefault()
        const reason = String(new FormData(event.currentTarget).get('reason') ?? '')
        form.submit({ params: { draw, entrant: row.id }, body: { reason } })
      }}
    >
      <h3 id="take-out-title">
        Take {row.name} out of the list, with {countOf(row.tickets, 'ticket')}
      </h3>
      {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
      <TextArea
        name="reason"
        label="Reason"
        hint="It stands in “Who changed what”, which only your organisation reads."
        rows={2}
        error={form.faultOf('reason')}
      />
      <p className="buttons">
        <Button type="submit" danger busy={form.busy}>
          Take out
        </Button>
        <Button quiet onClick={onKeep}>
          Keep in the list
        </Button>
      </p>
    </form>
  )
}
