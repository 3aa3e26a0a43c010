import { useQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useSearchParams, type LoaderFunctionArgs } from 'react-router'
import { printSlips, SLIPS_AT_ONCE, type SlipView } from '#shared/schemas/api/entry.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { sessionQuery } from '#src/lib/session.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { RadioField } from '#src/ui/field.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import { useDraw } from '../draw/use-draw.ts'
import { Slip } from './slip.tsx'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, sessionQuery)
  return null
}

type Who = 'without-email' | 'everybody'
type Made = ResponseOf<typeof printSlips>

/** Makes slips with new codes and prints them, many to a sheet. The codes are shown this once. */
export function Component() {
  const { api, origin } = useApp()
  const draw = useDraw()
  const [search] = useSearchParams()
  const one = search.get('entrant')
  const { data: session } = useQuery(sessionQuery(api))
  const [who, setWho] = useState<Who>('without-email')
  const [made, setMade] = useState<Made | null>(null)
  const form = useSubmit(printSlips, setMade)
  const make = (after: string | null, choice: Who = who) =>
    form.submit({ params: { draw: draw.id }, body: { who: one === null ? choice : { entrant: one }, after } })
  const fingerprint = session?.site.keyFingerprint ?? ''
  return (
    <>
      <Head title={`Slips: ${draw.title}`} description="Slips with codes for entrants without e-mail." />
      <Part
        title="Slips"
        className="not-printed"
        note={`At most ${formatNumber(SLIPS_AT_ONCE)} at once, eight to a sheet of A4`}
      >
        {draw.state === 'draft' ? (
          <p className="waits measure mt-0">Slips can be printed once the draw is open.</p>
        ) : made === null ? (
          <form
            className="form"
            method="post"
            noValidate
            onSubmit={(event) => {
              event.preventDefault()
              const choice =
                new FormData(event.currentTarget).get('who') === 'everybody' ? 'everybody' : 'without-email'
              setWho(choice)
              make(null, choice)
            }}
          >
            {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
            {one === null ? (
              <RadioField
                name="who"
                legend="For whom?"
                defaultValue="without-email"
                options={[
                  {
                    value: 'without-email',
                    text: 'Entrants without an e-mail address',
                    hint: countOf(draw.counts.entrants - draw.counts.withEmail, 'entrant'),
                  },
                  { value: 'everybody', text: 'Everybody', hint: countOf(draw.counts.entrants, 'entrant') },
                ]}
              />
            ) : (
              <p className="measure">A slip for one entrant.</p>
            )}
            <p className="note measure">
              Each slip gets a new code. Slips that you printed before go on working. Whoever has a slip can open that
              entry, so hand it to the entrant and to nobody else.
            </p>
            <p className="buttons">
              <Button type="submit" busy={form.busy}>
                {one === null ? 'Make the slips' : 'Make the slip'}
              </Button>
            </p>
          </form>
        ) : (
          <MadeSlips made={made} busy={form.busy} problem={form.detail} onMore={make} />
        )}
      </Part>
      {made && made.slips.length > 0 ? (
        <section className="slips" aria-label="Slips">
          {made.slips.map((slip: SlipView) => (
            <Slip key={slip.entrant} slip={slip} draw={draw} origin={origin} fingerprint={fingerprint} />
          ))}
        </section>
      ) : null}
    </>
  )
}

interface MadeSlipsProps {
  readonly made: Made
  readonly busy: boolean
  readonly problem: string | undefined
  readonly onMore: (after: string | null) => void
}

function MadeSlips({ made, busy, problem, onMore }: MadeSlipsProps) {
  const last = made.slips.at(-1)
  if (!last) return <p>There is nobody to print a slip for.</p>
  return (
    <>
      <Notice title={`${countOf(made.slips.length, 'slip')} made`}>
        <p role="status">
          Print them now: the codes are shown this once, and the site keeps no copy that could be read again.
        </p>
      </Notice>
      {problem ? <ErrorSummary detail={problem} errors={[]} /> : null}
      <p className="buttons mt-unit-2">
        <Button onClick={() => window.print()}>Print them</Button>
        {made.more ? (
          <Button quiet busy={busy} onClick={() => onMore(last.entrant)}>
            Make the next slips
          </Button>
        ) : null}
      </p>
    </>
  )
}
