import { nameWitness, removeWitness, stateAsWitness, type OfficeDraw } from '#shared/schemas/api/office.ts'
import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useApp } from '#src/lib/app-context.ts'
import { sessionQuery } from '#src/lib/session.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button, TextButton } from '#src/ui/button.tsx'
import { digestGroups } from '#src/ui/digest.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { SelectField, TextArea, TextField } from '#src/ui/field.tsx'
import { formatMoment } from '#src/ui/format-time.ts'
import { Part } from '#src/ui/page.tsx'
import { peopleQuery, useKeepDraw } from '../api/queries.ts'
import { useRole } from '../use-role.ts'

/** Who watches the draw, what they have said, and for a witness: saying it. */
export function WitnessPart({ draw }: { readonly draw: OfficeDraw }) {
  const role = useRole()
  const mayName = role !== 'witness' && ['draft', 'open', 'closed', 'sealed'].includes(draw.state)
  return (
    <Part title="Witnesses" note="Independent of the promoter; named on the public page with their connection.">
      {draw.witnesses.length === 0 ? (
        <p>No witness is named.</p>
      ) : (
        <ul className="problems">
          {draw.witnesses.map((witness) => (
            <li key={witness.id}>
              <span className="at">Witness</span>
              <div>
                <p>
                  <b>{witness.name}</b>, {witness.role}. Connection with the organisation: {witness.connection}
                  {witness.person ? '' : ' Signs on paper: has no account.'}
                </p>
                <Statements draw={draw} name={witness.name} />
                {mayName && draw.statements.every(({ witness: who }) => who !== witness.name) ? (
                  <Remove draw={draw} witness={witness.id} name={witness.name} />
                ) : null}
              </div>
            </li>
          ))}
        </ul>
      )}
      <Speak draw={draw} />
      {mayName ? <Name draw={draw} /> : null}
    </Part>
  )
}

function Statements({ draw, name }: { readonly draw: OfficeDraw; readonly name: string }) {
  return draw.statements
    .filter(({ witness }) => witness === name)
    .map((said) => (
      <p key={`${said.about} ${said.at}`} className="note">
        {said.verdict === 'confirmed' ? 'Confirmed' : 'Refused'} the {said.about},{' '}
        {formatMoment(said.at, draw.timeZone)}
        {said.words ? `: “${said.words}”` : '.'}
      </p>
    ))
}

function Remove({
  draw,
  witness,
  name,
}: {
  readonly draw: OfficeDraw
  readonly witness: string
  readonly name: string
}) {
  const keep = useKeepDraw()
  const form = useSubmit(removeWitness, keep)
  return (
    <p>
      <TextButton
        aria-label={`Take ${name} off as witness`}
        aria-disabled={form.busy || undefined}
        onClick={() => form.submit({ params: { draw: draw.id, witness } })}
      >
        Take off
      </TextButton>
      {form.detail ? (
        <span className="fault" role="alert">
          {' '}
          {form.detail}
        </span>
      ) : null}
    </p>
  )
}

function Name({ draw }: { readonly draw: OfficeDraw }) {
  const { api } = useApp()
  const keep = useKeepDraw()
  const { data: people } = useQuery(peopleQuery(api, draw.organisation.slug))
  const [named, setNamed] = useState(0)
  const form = useSubmit(nameWitness, async (changed) => {
    setNamed((count) => count + 1)
    await keep(changed)
  })
  const accounts = people?.people.filter((person) => person.role === 'witness') ?? []
  return (
    <details className="mt-unit-2">
      <summary className="text-button">Name a witness</summary>
      <form
        key={named}
        className="form narrow-form panel-form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          const data = new FormData(event.currentTarget)
          const value = (name: string) => String(data.get(name) ?? '').trim()
          form.submit({
            params: { draw: draw.id },
            body: {
              name: value('name'),
              role: value('role'),
              connection: value('connection'),
              person: value('person') || null,
            },
          })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        <TextField name="name" label="Name" error={form.faultOf('name')} />
        <TextField
          name="role"
          label="Who they are"
          hint="For example: clerk of the parish."
          error={form.faultOf('role')}
        />
        <TextField
          name="connection"
          label="Connection with the organisation"
          hint="For example: none. The public reads it."
          error={form.faultOf('connection')}
        />
        <SelectField
          name="person"
          label="Account"
          hint="A witness with an account confirms on their own device. Invite them under People first."
          error={form.faultOf('person')}
          options={[
            { value: '', text: 'No account: signs on paper' },
            ...accounts.map((person) => ({ value: person.id, text: `${person.name}, ${person.email}` })),
          ]}
        />
        <p className="buttons">
          <Button small type="submit" busy={form.busy}>
            Name this witness
          </Button>
        </p>
      </form>
    </details>
  )
}

/** Whether a witness has spoken about what is in force now. A statement about a seal that was replaced is not. */
export function hasSpoken(
  draw: Pick<OfficeDraw, 'statements' | 'sealedAt'>,
  witness: string,
  about: 'seal' | 'result',
) {
  return draw.statements.some(
    (said) =>
      said.witness === witness && said.about === about && (about === 'result' || said.at >= (draw.sealedAt ?? '')),
  )
}

function Speak({ draw }: { readonly draw: OfficeDraw }) {
  const { api } = useApp()
  const me = useQuery(sessionQuery(api)).data?.person?.id
  const about = draw.state === 'sealed' ? 'seal' : 'result'
  const digest = about === 'seal' ? draw.sealDigest : draw.resultDigest
  const witness = draw.witnesses.find(({ person }) => person !== null && person.id === me)
  if (!draw.may.state || digest === null || (witness && hasSpoken(draw, witness.name, about))) return null
  return <SpeakForm draw={draw} about={about} digest={digest} />
}

interface SpeakFormProps {
  readonly draw: OfficeDraw
  readonly about: 'seal' | 'result'
  readonly digest: string
}

function SpeakForm({ draw, about, digest }: SpeakFormProps) {
  const keep = useKeepDraw()
  const form = useSubmit(stateAsWitness, keep)
  const say = (verdict: 'confirmed' | 'refused', words: string) =>
    form.submit({ params: { draw: draw.id }, body: { about, digest, verdict, words } })
  return (
    <form
      className="form panel-form"
      method="post"
      noValidate
      onSubmit={(event) => {
        event.preventDefault()
        const submitter = (event.nativeEvent as SubmitEvent).submitter as HTMLButtonElement | null
        const words = String(new FormData(event.currentTarget).get('words') ?? '')
        say(submitter?.value === 'refused' ? 'refused' : 'confirmed', words)
      }}
    >
      <h3>As a witness: the {about}</h3>
      {about === 'seal' ? (
        <p className="measure">
          Compare all 64 digits with the public page and with your paper, and the counts above with the
          promoter&rsquo;s: <span className="hex">{digestGroups(digest).join(' ')}</span>
        </p>
      ) : (
        <p className="measure">
          Run the check on the public page or on your own computer first. You confirm this result:{' '}
          <span className="hex">{digestGroups(digest).join(' ')}</span>
        </p>
      )}
      {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
      <TextArea
        name="words"
        label="Words"
        hint="Needed if you refuse: the public reads them. They never stop or repeat a draw."
        rows={2}
        error={form.faultOf('words')}
      />
      <p className="buttons">
        <Button type="submit" value="confirmed" name="verdict" busy={form.busy}>
          Confirm the {about}
        </Button>
        <Button type="submit" quiet value="refused" name="verdict" busy={form.busy}>
          Refuse, with these words
        </Button>
      </p>
    </form>
  )
}
