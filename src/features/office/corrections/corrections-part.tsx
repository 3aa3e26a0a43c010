import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useState } from 'react'
import { answerCorrection, type OfficeCorrection } from '#shared/schemas/api/entry.ts'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { detailsOf, useSubmit } from '#src/lib/use-submit.ts'
import { Button, TextButton } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { RadioField, TextArea } from '#src/ui/field.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Part } from '#src/ui/page.tsx'
import { Failure } from '#src/ui/states.tsx'
import { Time } from '#src/ui/time.tsx'
import { correctionsQuery } from '../api/queries.ts'
import { useRole } from '../use-role.ts'

/** What entrants ask to have corrected: each is answered once, in words that go to them. */
export function CorrectionsPart({ draw }: { readonly draw: OfficeDraw }) {
  const { api } = useApp()
  const witness = useRole() === 'witness'
  const [page, setPage] = useState(1)
  const { data, error, refetch } = useQuery({ ...correctionsQuery(api, draw.id, page), enabled: !witness })
  if (witness) return null
  if (error && !data) {
    return (
      <Part title="Corrections">
        <Failure
          title="The requests could not be read"
          detail={detailsOf(error).detail}
          onRetry={() => void refetch()}
        />
      </Part>
    )
  }
  if (!data || data.total === 0) return null
  return (
    <Part
      title="Corrections"
      note={data.open > 0 ? `${countOf(data.open, 'request')} of entrants to answer` : 'All requests are answered'}
    >
      <ul className="account">
        {data.items.map((item) => (
          <Request key={item.id} item={item} draw={draw} />
        ))}
      </ul>
      {data.total > data.pageSize ? (
        <p className="buttons mt-unit">
          {page > 1 ? (
            <Button small quiet onClick={() => setPage(page - 1)}>
              Earlier in this list
            </Button>
          ) : null}
          {page * data.pageSize < data.total ? (
            <Button small quiet onClick={() => setPage(page + 1)}>
              Further in this list
            </Button>
          ) : null}
        </p>
      ) : null}
    </Part>
  )
}

interface RequestProps {
  readonly item: OfficeCorrection
  readonly draw: OfficeDraw
}

function Request({ item, draw }: RequestProps) {
  const [answering, setAnswering] = useState(false)
  return (
    <li>
      <Time at={item.askedAt} timeZone={draw.timeZone} as="brief" />
      <div>
        <p>
          <b>{item.entrant.name}</b> (<span className="mono">{item.entrant.code}</span>): “{item.words}”
        </p>
        {item.state !== 'open' ? (
          <p>
            {item.state === 'done' ? 'Done' : 'Refused'}
            {item.answeredBy ? ` by ${item.answeredBy}` : ''}
            {item.answeredAt ? `, ${formatMoment(item.answeredAt, draw.timeZone)}` : ''}: {item.answer}
          </p>
        ) : !item.mayAnswer ? (
          <p className="note">
            {item.afterSeal || draw.state === 'sealed'
              ? 'The list is sealed: a promoter answers this, by a new seal or by refusing with a reason.'
              : 'You cannot answer this.'}
          </p>
        ) : answering ? (
          <Answer item={item} draw={draw} onClose={() => setAnswering(false)} />
        ) : (
          <p>
            <TextButton aria-label={`Answer ${item.entrant.name}`} onClick={() => setAnswering(true)}>
              Answer
            </TextButton>
          </p>
        )}
      </div>
    </li>
  )
}

function Answer({ item, draw, onClose }: RequestProps & { readonly onClose: () => void }) {
  const queryClient = useQueryClient()
  const form = useSubmit(answerCorrection, async () => {
    await queryClient.invalidateQueries({ queryKey: ['office', 'draw', draw.id] })
    onClose()
  })
  const sealed = draw.state === 'sealed'
  return (
    <form
      className="form mt-unit"
      method="post"
      noValidate
      aria-label={`Answer ${item.entrant.name}`}
      onSubmit={(event) => {
        event.preventDefault()
        const data = new FormData(event.currentTarget)
        form.submit({
          params: { draw: draw.id, correction: item.id },
          body: { verdict: data.get('verdict') === 'refused' ? 'refused' : 'done', words: String(data.get('answer')) },
        })
      }}
    >
      {form.failed ? (
        <ErrorSummary
          detail={form.detail}
          errors={form.faults.map((fault) => (fault.field === 'words' ? { ...fault, field: 'answer' } : fault))}
        />
      ) : null}
      <RadioField
        name="verdict"
        legend="What became of it?"
        defaultValue={sealed ? 'refused' : 'done'}
        options={[
          {
            value: 'done',
            text: 'It was done',
            hint: sealed ? 'Only once a new seal has it.' : 'Change the entry in the list first: this changes nothing.',
          },
          { value: 'refused', text: 'It is refused' },
        ]}
      />
      <TextArea
        name="answer"
        label="What the entrant is told"
        rows={3}
        maxLength={1000}
        error={form.faultOf('words')}
      />
      <p className="buttons">
        <Button small type="submit" busy={form.busy}>
          Send the answer
        </Button>
        <Button small quiet onClick={onClose}>
          Cancel
        </Button>
      </p>
    </form>
  )
}
