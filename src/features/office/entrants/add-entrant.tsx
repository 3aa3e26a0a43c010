import { useQueryClient } from '@tanstack/react-query'
import { useEffect, useRef, useState } from 'react'
import { addEntrant } from '#shared/schemas/api/office.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { EntrantFields, entrantFrom } from './entrant-fields.tsx'

interface AddEntrantProps {
  readonly draw: string
  readonly onClose: () => void
  readonly onTyped: (typed: boolean) => void
}

/** Stays open for the next entrant, so that a pile of counterfoils is typed without the mouse. */
export function AddEntrant({ draw, onClose, onTyped }: AddEntrantProps) {
  const queryClient = useQueryClient()
  const [added, setAdded] = useState<{ readonly count: number; readonly words: string }>({ count: 0, words: '' })
  const form = useSubmit(addEntrant, async (row) => {
    onTyped(false)
    setAdded(({ count }) => ({
      count: count + 1,
      words: `Added ${row.name} with ${countOf(row.tickets, 'ticket')}.`,
    }))
    await queryClient.invalidateQueries({ queryKey: ['office', 'draw', draw] })
  })
  const box = useRef<HTMLFormElement>(null)
  useEffect(() => {
    box.current?.querySelector<HTMLInputElement>('#name')?.focus()
  }, [added.count])
  return (
    <form
      key={added.count}
      ref={box}
      className="form panel-form"
      method="post"
      noValidate
      aria-labelledby="add-title"
      onChange={() => onTyped(true)}
      onSubmit={(event) => {
        event.preventDefault()
        form.submit({ params: { draw }, body: entrantFrom(new FormData(event.currentTarget)) })
      }}
    >
      <h3 id="add-title">Add an entrant</h3>
      {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
      <EntrantFields faultOf={form.faultOf} />
      <p className="buttons">
        <Button type="submit" busy={form.busy}>
          Add to the list
        </Button>
        <Button quiet onClick={onClose}>
          {added.count > 0 ? 'Done' : 'Cancel'}
        </Button>
        <span role="status">{form.failed ? '' : added.words}</span>
      </p>
    </form>
  )
}
