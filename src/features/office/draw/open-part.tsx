import { openDraw, type OfficeDraw } from '#shared/schemas/api/office.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { Part } from '#src/ui/page.tsx'
import { useKeepDraw } from '../api/queries.ts'
import { useRole } from '../use-role.ts'

/** Opening a draft for entries: what still stands in the way, and who can do it. */
export function OpenPart({ draw }: { readonly draw: OfficeDraw }) {
  const keep = useKeepDraw()
  const role = useRole()
  const form = useSubmit(openDraw, keep)
  if (draw.state !== 'draft') return null
  const problems = draw.problems.open
  return (
    <Part title="Open for entries">
      <p className="measure">
        Opening publishes the draw at /draws/{draw.slug}, fixes that address and the terms, and lets entrants be brought
        in. It stands in the public log from then on and cannot vanish.
      </p>
      {problems.length > 0 ? (
        <ul className="checks mt-unit-2">
          {problems.map((problem) => (
            <li key={problem}>{problem}</li>
          ))}
        </ul>
      ) : null}
      {form.failed ? (
        <div className="mt-unit-2">
          <ErrorSummary title="The draw is not open" detail={form.detail} errors={form.faults} />
        </div>
      ) : null}
      <p className="buttons mt-unit-2">
        {role === 'promoter' ? (
          <Button
            aria-disabled={draw.may.open ? undefined : true}
            busy={form.busy}
            onClick={() => {
              if (draw.may.open) form.submit({ params: { draw: draw.id }, body: { version: draw.version } })
            }}
          >
            Open for entries
          </Button>
        ) : (
          <span className="note">The promoter opens it.</span>
        )}
        {role === 'promoter' && problems.length > 0 ? (
          <span className="note">Put the {problems.length === 1 ? 'point' : 'points'} above right first.</span>
        ) : null}
      </p>
    </Part>
  )
}
