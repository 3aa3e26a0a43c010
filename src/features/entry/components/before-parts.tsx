import { useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import { askCorrection, chooseAnnouncement, type CorrectionView, type EntryView } from '#shared/schemas/api/entry.ts'
import type { Announcement } from '#shared/entrants/announcement.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { RadioField, TextArea } from '#src/ui/field.tsx'
import { Part } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'
import { useHydrated } from '#src/ui/use-hydrated.ts'
import { entryQuery } from '../api/queries.ts'
import { useApp } from '#src/lib/app-context.ts'

interface PartProps {
  readonly entry: EntryView
  readonly token: string
}

/** Keeps the entry that a form's endpoint answers with. */
function useKeepEntry(token: string) {
  const { api } = useApp()
  const queryClient = useQueryClient()
  return (entry: EntryView) => queryClient.setQueryData(entryQuery(api, token).queryKey, entry)
}

/** How they are announced if they win: theirs to choose until the list is closed. */
export function AnnouncementPart({ entry, token }: PartProps) {
  const { announcement } = entry
  const keep = useKeepEntry(token)
  const [saved, setSaved] = useState(false)
  const form = useSubmit(chooseAnnouncement, (answer) => {
    keep(answer)
    setSaved(true)
  })
  if (!announcement.open) {
    return (
      <Part title="If you win">
        <p className="measure">
          You will be announced as “{entry.label}”. That was yours to choose until the list was closed
          {entry.sealed ? '; now it is sealed with your entry' : ''}.
        </p>
      </Part>
    )
  }
  const { words } = announcement
  return (
    <Part title="If you win">
      <form
        className="form"
        method="post"
        noValidate
        onChange={() => setSaved(false)}
        onSubmit={(event) => {
          event.preventDefault()
          const choice = String(new FormData(event.currentTarget).get('choice')) as Announcement
          form.submit({ params: { token }, body: { choice } })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <RadioField
          name="choice"
          legend="How would you be announced? Your chance is the same whatever you choose."
          defaultValue={announcement.choice}
          error={form.faultOf('choice')}
          options={[
            { value: 'label', text: `“${words.label}”`, hint: 'As the organiser wrote it.' },
            { value: 'initials', text: `“${words.initials}”`, hint: 'Your initials.' },
            {
              value: 'code',
              text: `“${words.code}”`,
              hint: 'Your code alone: only you and the organiser know whose it is.',
            },
          ]}
        />
        <p className="buttons">
          <Button type="submit" busy={form.busy}>
            Save my choice
          </Button>
          <span role="status">{saved && !form.failed ? `Saved: “${entry.label}”.` : ''}</span>
        </p>
        <NeedsScripts />
      </form>
    </Part>
  )
}

/** What is wrong with an entry: asked of the office, and what came of it. */
export function CorrectionPart({ entry, token }: PartProps) {
  const { items, refusal } = entry.corrections
  const keep = useKeepEntry(token)
  const [sent, setSent] = useState(0)
  const form = useSubmit(askCorrection, (answer) => {
    keep(answer)
    setSent((count) => count + 1)
  })
  return (
    <Part
      title="Is something wrong?"
      note={refusal === null && entry.sealed ? <p>Until the draw the promoter can still make a new seal</p> : undefined}
    >
      {items.length > 0 ? (
        <ul className="account">
          {items.map((item) => (
            <Correction key={item.id} item={item} timeZone={entry.draw.timeZone} />
          ))}
        </ul>
      ) : null}
      {refusal === null ? (
        <form
          key={sent}
          className={items.length > 0 ? 'form mt-unit-2' : 'form'}
          method="post"
          noValidate
          onSubmit={(event) => {
            event.preventDefault()
            const words = String(new FormData(event.currentTarget).get('words'))
            form.submit({ params: { token }, body: { words } })
          }}
        >
          {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
          <TextArea
            name="words"
            label="What is wrong, and what should it be?"
            hint={
              entry.sealed
                ? 'The list is sealed, so this goes to the promoter, who makes a new seal in public or refuses with a reason.'
                : 'The organiser reads it and answers you here and by mail. Nothing changes by itself.'
            }
            rows={4}
            maxLength={1000}
            error={form.faultOf('words')}
          />
          <p className="buttons">
            <Button type="submit" busy={form.busy}>
              Ask for the correction
            </Button>
            <span role="status">{sent > 0 && !form.failed ? 'Sent. The answer will stand here.' : ''}</span>
          </p>
          <NeedsScripts />
        </form>
      ) : (
        <p className={items.length > 0 ? 'measure mt-unit' : 'measure'}>{refusal}</p>
      )}
      <p className="note measure mt-unit">
        The promoter answers for this draw: {entry.draw.promoter.name}, {entry.draw.promoter.address}. Name your code,{' '}
        <span className="mono">{entry.code}</span>.
      </p>
    </Part>
  )
}

const STATES = { open: 'Waits for an answer.', done: 'Done.', refused: 'Refused.' } as const

function Correction({ item, timeZone }: { readonly item: CorrectionView; readonly timeZone: string }) {
  return (
    <li>
      <Time at={item.askedAt} timeZone={timeZone} as="brief" />
      <div>
        <p>“{item.words}”</p>
        <p>
          <b>{STATES[item.state]}</b> {item.answer}
        </p>
      </div>
    </li>
  )
}

function NeedsScripts() {
  const ready = useHydrated()
  return ready ? null : (
    <noscript>
      <p className="note">
        This form needs JavaScript. Turn it on for this site, or write to the promoter and name your code.
      </p>
    </noscript>
  )
}

/** The terms as they stood for this entry. */
export function TermsPart({ entry }: { readonly entry: EntryView }) {
  return (
    <Part title="The terms" note={entry.sealed ? <p>As they were sealed</p> : <p>As published</p>}>
      <details className="fold">
        <summary>Read the terms</summary>
        <div className="terms measure">{entry.draw.terms}</div>
      </details>
    </Part>
  )
}
