import { useState } from 'react'
import { useParams } from 'react-router'
import { sendEntryLink } from '#shared/schemas/api/entry.ts'
import type { EntrantRow } from '#shared/schemas/api/office.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button, ButtonLink } from '#src/ui/button.tsx'
import { drawPath } from '../paths.ts'

interface EntrantAccessProps {
  readonly draw: string
  readonly row: EntrantRow
  readonly mayWrite: boolean
}

/** How an entrant comes to their private page: the link once more by mail, or a printed slip. */
export function EntrantAccess({ draw, row, mayWrite }: EntrantAccessProps) {
  const organisation = useParams().organisation ?? ''
  const [sent, setSent] = useState(false)
  const form = useSubmit(sendEntryLink, () => setSent(true))
  if (!mayWrite) return null
  return (
    <p className="buttons mt-unit">
      {row.email === null ? null : (
        <Button
          small
          quiet
          busy={form.busy}
          onClick={() => {
            setSent(false)
            form.submit({ params: { draw, entrant: row.id }, body: {} })
          }}
        >
          Mail the private link again
        </Button>
      )}
      <ButtonLink small quiet to={`${drawPath(organisation, draw, 'slips')}?entrant=${row.id}`}>
        Print a slip
      </ButtonLink>
      <span role="status">{form.failed ? form.detail : sent ? `A new link is on its way to ${row.email}.` : ''}</span>
    </p>
  )
}
