import { useState } from 'react'
import { updateDraw, type OfficeDraw } from '#shared/schemas/api/office.ts'
import { Head } from '#src/lib/head.tsx'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { formatMoney } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Notice } from '#src/ui/notice.tsx'
import { Facts, Part } from '#src/ui/page.tsx'
import { useKeepDraw } from '../api/queries.ts'
import { DrawFields, drawFault, drawFrom, RULE_WORDS } from './draw-fields.tsx'
import { OpenPart } from './open-part.tsx'
import { useDraw } from './use-draw.ts'

export function Component() {
  const draw = useDraw()
  return draw.may.edit ? <Editor draw={draw} /> : <Reader draw={draw} />
}

function Editor({ draw }: { readonly draw: OfficeDraw }) {
  const keep = useKeepDraw()
  // The version that the form was filled from: what somebody else saves meanwhile is not overwritten unseen.
  const [version, setVersion] = useState(draw.version)
  const [saved, setSaved] = useState(false)
  const form = useSubmit(updateDraw, async (changed) => {
    setVersion(changed.version)
    setSaved(true)
    await keep(changed)
  })
  const faults = form.faults.map(drawFault)
  const currency = draw.ticketPrice?.currency ?? draw.organisation.currency
  return (
    <>
      <Head
        title={`${form.failed ? 'Error: ' : ''}Terms: ${draw.title}`}
        description="What is stated about the draw."
      />
      <Part title="Terms" note={`Public at ${'/draws/'}${draw.slug} once it is open`}>
        <form
          className="form"
          method="post"
          noValidate
          onChange={() => setSaved(false)}
          onSubmit={(event) => {
            event.preventDefault()
            setSaved(false)
            form.submit({
              params: { draw: draw.id },
              body: { ...drawFrom(new FormData(event.currentTarget), currency), version },
            })
          }}
        >
          {form.status === 409 ? (
            <Conflict detail={form.detail} onTake={() => setVersion(draw.version)} />
          ) : form.failed ? (
            <ErrorSummary detail={form.detail} errors={faults} />
          ) : null}
          <DrawFields
            values={draw}
            timeZone={draw.timeZone}
            currency={currency}
            faultOf={(field) => faults.find((fault) => fault.field === field)?.message}
          />
          <p className="buttons">
            <Button type="submit" busy={form.busy}>
              Save
            </Button>
            <span role="status">{saved && !form.failed ? 'Saved.' : ''}</span>
          </p>
        </form>
      </Part>
      <OpenPart draw={draw} />
    </>
  )
}

function Conflict({ detail, onTake }: { readonly detail: string | undefined; readonly onTake: () => void }) {
  return (
    <Notice title="Somebody else has changed this draw" fault>
      <p role="alert">
        {detail} What you typed still stands below. Look at their version in another window; then save yours over it, or
        load this page again to go on from theirs.
      </p>
      <p className="mt-unit">
        <Button small quiet onClick={onTake}>
          Let my version be saved over it
        </Button>
      </p>
    </Notice>
  )
}

function Reader({ draw }: { readonly draw: OfficeDraw }) {
  const moment = (at: string) => formatMoment(at, draw.timeZone)
  return (
    <>
      <Head title={`Terms: ${draw.title}`} description="What was published about the draw." />
      <Part
        title="Terms"
        note={
          draw.state === 'draft'
            ? 'Only its promoter and organisers change a draft.'
            : 'Published when the draw opened, and fixed since then.'
        }
      >
        <Facts
          items={[
            ['In aid of', draw.goodCause],
            ['Promoter', `${draw.promoterName}, ${draw.promoterAddress}`],
            draw.licence ? ['Registered', `${draw.licence}, as the promoter states`] : null,
            ['Price of a ticket', draw.ticketPrice ? formatMoney(draw.ticketPrice) : 'Free'],
            draw.minimumAge === null ? null : ['Minimum age', String(draw.minimumAge)],
            ['List closes', moment(draw.closesAt)],
            ['Draw', moment(draw.drawAt)],
            ['Rule', RULE_WORDS[draw.rule]],
            ['Reserves', String(draw.reserves)],
          ]}
        />
        <div className="terms-text mt-unit-2">{draw.terms}</div>
      </Part>
      <OpenPart draw={draw} />
    </>
  )
}
