import { useQueryClient } from '@tanstack/react-query'
import { useNavigate } from 'react-router'
import { createOrganisation } from '#shared/schemas/api/administrator.ts'
import { Head } from '#src/lib/head.tsx'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TextField } from '#src/ui/field.tsx'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { OrganisationFields, organisationFrom } from './organisation-fields.tsx'

export function Component() {
  const navigate = useNavigate()
  const queryClient = useQueryClient()
  const form = useSubmit(createOrganisation, async (row) => {
    await queryClient.invalidateQueries({ queryKey: ['administrator'] })
    await navigate(`/admin/organisations/${row.slug}`)
  })
  return (
    <>
      <Head
        title={form.failed ? 'Error: Make an organisation' : 'Make an organisation'}
        description="Make an organisation and invite its first promoter."
      />
      <Title
        title="Make an organisation"
        lead="Its first promoter is invited by mail and brings in everybody else. Nothing of it is public until you approve it."
      />
      <Part title="The organisation" note="Check that it is real, and that whoever asks acts for it.">
        <form
          className="form narrow-form"
          method="post"
          noValidate
          onSubmit={(event) => {
            event.preventDefault()
            const data = new FormData(event.currentTarget)
            form.submit({
              body: { ...organisationFrom(data), promoterEmail: String(data.get('promoterEmail')).trim() },
            })
          }}
        >
          {form.failed ? <ErrorSummary detail={form.detail} errors={form.faults} /> : null}
          <OrganisationFields faultOf={form.faultOf} />
          <TextField
            name="promoterEmail"
            type="email"
            label="E-mail address of the first promoter"
            hint="The person who answers for its draws."
            error={form.faultOf('promoterEmail')}
          />
          <p className="buttons">
            <Button type="submit" busy={form.busy}>
              Make it and send the invitation
            </Button>
            <Link to="/admin/organisations">Back to the list</Link>
          </p>
        </form>
      </Part>
    </>
  )
}
