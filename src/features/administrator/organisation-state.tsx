import { useQueryClient } from '@tanstack/react-query'
import { changeOrganisationState, type OrganisationRow } from '#shared/schemas/api/administrator.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextArea } from '#src/ui/field.tsx'
import { Part } from '#src/ui/page.tsx'

const WORDS = {
  pending: {
    words:
      'Its people can sign in and prepare drafts, but nothing can open or be public. Approve it once you know that it is real and that its promoter acts for it.',
    action: 'Approve the organisation',
    next: 'approved',
  },
  approved: {
    words:
      'Suspending stops its people from writing and hides its drafts. Its public pages stay, with a notice and your reason, and what it has sealed is still drawn.',
    action: 'Suspend the organisation',
    next: 'suspended',
  },
  suspended: {
    words:
      'Its people cannot write and its drafts are hidden. Restoring gives both back; the reason stands in the public log.',
    action: 'Restore the organisation',
    next: 'approved',
  },
} as const

/** Approving, suspending and restoring; the last two with a reason that the public reads. */
export function OrganisationState({ organisation }: { readonly organisation: OrganisationRow }) {
  const queryClient = useQueryClient()
  const form = useSubmit(changeOrganisationState, () => queryClient.invalidateQueries({ queryKey: ['administrator'] }))
  const { words, action, next } = WORDS[organisation.state]
  const needsReason = organisation.state !== 'pending'
  return (
    <Part title="State">
      <p className="measure">{words}</p>
      <form
        className="form narrow-form mt-unit-2"
        method="post"
        noValidate
        key={organisation.state}
        onSubmit={(event) => {
          event.preventDefault()
          const reason = String(new FormData(event.currentTarget).get('reason') ?? '')
          form.submit({
            params: { organisation: organisation.slug },
            body: { version: organisation.version, state: next, reason: needsReason ? reason : null },
          })
        }}
      >
        {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
        {needsReason ? (
          <TextArea
            name="reason"
            label="Reason"
            hint="The public reads it. Name and describe nobody."
            rows={2}
            error={form.faultOf('reason')}
          />
        ) : null}
        <p className="buttons">
          <Button type="submit" busy={form.busy} danger={next === 'suspended'}>
            {action}
          </Button>
        </p>
      </form>
    </Part>
  )
}
