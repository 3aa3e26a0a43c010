import { useState, type ReactNode } from 'react'
import { cancelDraw, closeDraw, postponeDraw, reopenDraw, type OfficeDraw } from '#shared/schemas/api/office.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextArea, TextField } from '#src/ui/field.tsx'
import { zoneName } from '#src/ui/format-time.ts'
import { Part } from '#src/ui/page.tsx'
import { useKeepDraw } from '../api/queries.ts'
import { isBeingMade } from './sealing.ts'
import { SealingNotice } from './sealing-notice.tsx'

type Action = 'close' | 'reopen' | 'postpone' | 'cancel'

/** Closing, reopening, postponing and cancelling: the promoter's, each with its own form and confirmation. */
export function RunPart({ draw }: { readonly draw: OfficeDraw }) {
  const [chosen, setChosen] = useState<Action | null>(null)
  const { may } = draw
  const actions = (
    [
      ['close', may.close, 'Close the list now'],
      ['reopen', may.reopen, 'Reopen the list'],
      ['postpone', may.postpone, 'Postpone the draw'],
      ['cancel', may.cancel, 'Cancel the draw'],
    ] as const
  ).filter(([, allowed]) => allowed)
  if (actions.length === 0) return null
  if (isBeingMade(draw)) {
    return (
      <Part title="Change its course">
        <SealingNotice draw={draw} />
      </Part>
    )
  }
  return (
    <Part title="Change its course" note="Only the promoter. Each is public, with its reason and time.">
      {draw.sealing ? (
        <div className="mb-unit-2">
          <SealingNotice draw={draw} />
          <p className="note mt-unit">Whatever you choose here discards the seal that waits.</p>
        </div>
      ) : null}
      <p className="buttons">
        {actions.map(([action, , words]) => (
          <Button
            key={action}
            small
            quiet
            aria-expanded={chosen === action}
            onClick={() => setChosen(chosen === action ? null : action)}
          >
            {words}
          </Button>
        ))}
      </p>
      {chosen === 'close' && may.close ? <Close draw={draw} /> : null}
      {chosen === 'reopen' && may.reopen ? <Reopen draw={draw} /> : null}
      {chosen === 'postpone' && may.postpone ? <Postpone draw={draw} /> : null}
      {chosen === 'cancel' && may.cancel ? <Cancel draw={draw} /> : null}
      {draw.state === 'sealed' ? (
        <p className="note mt-unit-2">From the moment of the beacon&rsquo;s round nobody can postpone or cancel.</p>
      ) : null}
    </Part>
  )
}

interface FrameProps {
  readonly words: string
  readonly failed: boolean
  readonly detail: string | undefined
  readonly faults: readonly { readonly field: string; readonly message: string }[]
  readonly onSubmit: (value: (name: string) => string) => void
  readonly children: ReactNode
}

function Frame({ words, failed, detail, faults, onSubmit, children }: FrameProps) {
  return (
    <form
      className="form narrow-form panel-form"
      method="post"
      noValidate
      onSubmit={(event) => {
        event.preventDefault()
        const data = new FormData(event.currentTarget)
        onSubmit((name) => String(data.get(name) ?? '').trim())
      }}
    >
      <p>{words}</p>
      {failed ? <ErrorSummary detail={detail} errors={faults} /> : null}
      {children}
    </form>
  )
}

const Reason = ({ error }: { readonly error: string | undefined }) => (
  <TextArea name="reason" label="Reason" hint="The public reads it. Name and describe nobody." rows={2} error={error} />
)

function Close({ draw }: { readonly draw: OfficeDraw }) {
  const form = useSubmit(closeDraw, useKeepDraw())
  return (
    <Frame
      {...form}
      words="Nobody is added or changed from now on. The promoter can reopen a closed list with a public reason until it is sealed."
      onSubmit={() => form.submit({ params: { draw: draw.id }, body: { version: draw.version } })}
    >
      <p className="buttons">
        <Button small type="submit" busy={form.busy}>
          Close the list
        </Button>
      </p>
    </Frame>
  )
}

function Reopen({ draw }: { readonly draw: OfficeDraw }) {
  const form = useSubmit(reopenDraw, useKeepDraw())
  return (
    <Frame
      {...form}
      words="The list takes entrants again until its new closing time."
      onSubmit={(value) =>
        form.submit({
          params: { draw: draw.id },
          body: { version: draw.version, reason: value('reason'), closesAt: value('closesAt').slice(0, 16) },
        })
      }
    >
      <TextField
        name="closesAt"
        type="datetime-local"
        label="New closing time"
        hint={`In ${zoneName(draw.timeZone)}.`}
        error={form.faultOf('closesAt')}
      />
      <Reason error={form.faultOf('reason')} />
      <p className="buttons">
        <Button small type="submit" busy={form.busy}>
          Reopen the list
        </Button>
      </p>
    </Frame>
  )
}

function Postpone({ draw }: { readonly draw: OfficeDraw }) {
  const form = useSubmit(postponeDraw, useKeepDraw())
  const sealed = draw.state === 'sealed'
  return (
    <Frame
      {...form}
      words={
        sealed
          ? 'A new seal with a new draw time replaces the one in force, which stays public with your reason. Entrants get new receipts.'
          : 'Entries stay valid. The new times and your reason are public at once.'
      }
      onSubmit={(value) =>
        form.submit({
          params: { draw: draw.id },
          body: {
            version: draw.version,
            reason: value('reason'),
            drawAt: value('drawAt').slice(0, 16),
            ...(value('closesAt') ? { closesAt: value('closesAt').slice(0, 16) } : {}),
          },
        })
      }
    >
      {draw.state === 'open' ? (
        <TextField
          name="closesAt"
          type="datetime-local"
          label="The list closes"
          hint={`In ${zoneName(draw.timeZone)}.`}
          defaultValue={draw.closesAtLocal}
          error={form.faultOf('closesAt')}
        />
      ) : null}
      <TextField
        name="drawAt"
        type="datetime-local"
        label="New draw time"
        hint={`In ${zoneName(draw.timeZone)}.`}
        defaultValue={draw.drawAtLocal}
        error={form.faultOf('drawAt')}
      />
      <Reason error={form.faultOf('reason')} />
      <p className="buttons">
        <Button small type="submit" busy={form.busy}>
          Postpone the draw
        </Button>
      </p>
    </Frame>
  )
}

function Cancel({ draw }: { readonly draw: OfficeDraw }) {
  const form = useSubmit(cancelDraw, useKeepDraw())
  return (
    <Frame
      {...form}
      words="This is for good: the draw is never held, and its page says so with your reason. Entrants with an e-mail address are told. What was paid for tickets has to be given back as your terms say."
      onSubmit={(value) =>
        form.submit({
          params: { draw: draw.id },
          body: { version: draw.version, reason: value('reason'), title: value('title') },
        })
      }
    >
      <Reason error={form.faultOf('reason')} />
      <TextField
        name="title"
        label="Type the draw’s title to confirm"
        hint={draw.title}
        autoComplete="off"
        error={form.faultOf('title')}
      />
      <p className="buttons">
        <Button small danger type="submit" busy={form.busy}>
          Cancel the draw for good
        </Button>
      </p>
    </Frame>
  )
}
