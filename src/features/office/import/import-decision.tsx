import { useQuery, useQueryClient } from '@tanstack/react-query'
import { applyImport, discardImport, type ImportView } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Notice } from '#src/ui/notice.tsx'
import { importQuery, importsQuery } from '../api/queries.ts'
import { useDraw } from '../draw/use-draw.ts'
import { whyFixed } from '../entrants/list-words.ts'
import { likeness } from './import-words.ts'

interface ImportDecisionProps {
  readonly view: ImportView
}

/** Bringing a faultless file in, all of it or nothing, or throwing it away. */
export function ImportDecision({ view }: ImportDecisionProps) {
  const { api } = useApp()
  const queryClient = useQueryClient()
  const draw = useDraw()
  const earlier = useQuery(importsQuery(api, draw.id))
  const keep = async (answer: ImportView) => {
    await queryClient.invalidateQueries({ queryKey: ['office', 'draw', draw.id] })
    queryClient.setQueryData(importQuery(api, draw.id, answer.id).queryKey, answer)
  }
  const applying = useSubmit(applyImport, keep)
  const discarding = useSubmit(discardImport, keep)
  const params = { draw: draw.id, import: view.id }
  const same = likeness(view, earlier.data ?? [])
  const why = whyFixed(draw)
  const failed = applying.failed ? applying : discarding.failed ? discarding : null
  return (
    <>
      {failed ? (
        <div className="mb-unit-2">
          <ErrorSummary title="Nothing was brought in" detail={failed.detail} errors={failed.faults} />
        </div>
      ) : null}
      {view.state === 'ready' ? (
        <p className="measure">
          With them the list has {countOf(draw.counts.entrants + view.entrants, 'entrant')} and{' '}
          {countOf(draw.counts.tickets + view.tickets, 'ticket')}. All of them join it, or none.
        </p>
      ) : null}
      {view.state === 'ready' && same ? (
        <div className="mt-unit-2">
          <Notice title="Is this the same file again?">
            <p>
              {same.fileName}, with {countOf(same.entrants, 'entrant')} and {countOf(same.tickets, 'ticket')}, was
              brought in from the upload of {formatMoment(same.createdAt, draw.timeZone)}. Bringing it in twice doubles
              everybody&rsquo;s tickets.
            </p>
          </Notice>
        </div>
      ) : null}
      {why ? <p className="measure waits mt-unit-2">{why}</p> : null}
      {why === null && applying.busy ? (
        <p className="mt-unit-2" role="status">
          Bringing {countOf(view.entrants, 'entrant')} into the list. A million takes about a minute; you can leave this
          page.
        </p>
      ) : null}
      {why === null ? (
        <p className="buttons mt-unit-2">
          {view.state === 'ready' ? (
            <Button busy={applying.busy} onClick={() => applying.submit({ params })}>
              Bring {formatNumber(view.entrants)} {view.entrants === 1 ? 'entrant' : 'entrants'} into the list
            </Button>
          ) : null}
          <Button quiet busy={discarding.busy || applying.busy} onClick={() => discarding.submit({ params })}>
            Throw it away
          </Button>
        </p>
      ) : null}
    </>
  )
}
