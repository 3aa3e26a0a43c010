import { useQuery, useQueryClient } from '@tanstack/react-query'
import { useNavigate, useParams, type LoaderFunctionArgs } from 'react-router'
import { createDraw } from '#shared/schemas/api/office.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Skeleton } from '#src/ui/states.tsx'
import { officeDrawsQuery } from '../api/queries.ts'
import { drawPath, drawsPath } from '../paths.ts'
import { DrawFields, drawFault, drawFrom } from './draw-fields.tsx'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => officeDrawsQuery(api, args.params.organisation ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const slug = useParams().organisation ?? ''
  const { data } = useQuery(officeDrawsQuery(api, slug))
  const navigate = useNavigate()
  const queryClient = useQueryClient()
  const form = useSubmit(createDraw, async (draw) => {
    queryClient.setQueryData(['office', 'draw', draw.id], draw)
    await queryClient.invalidateQueries({ queryKey: ['office', 'draws', slug] })
    await navigate(drawPath(slug, draw.id, 'prizes'))
  })
  const faults = form.faults.map(drawFault)
  if (!data) return <Skeleton label="Reading the organisation" />
  const { organisation } = data
  return (
    <>
      <Head title={form.failed ? 'Error: Make a draw' : 'Make a draw'} description="Set up a draw on one screen." />
      <Title
        above={<Link to={drawsPath(slug)}>{organisation.name}</Link>}
        title="Make a draw"
        lead="A draft is seen by your organisation only. Everything can be changed until you open it for entries."
      />
      <Part title="The draw">
        <form
          className="form"
          method="post"
          noValidate
          onSubmit={(event) => {
            event.preventDefault()
            form.submit({
              params: { organisation: slug },
              body: drawFrom(new FormData(event.currentTarget), organisation.currency),
            })
          }}
        >
          {form.failed ? <ErrorSummary detail={form.detail} errors={faults} /> : null}
          <DrawFields
            defaults={{ promoterAddress: organisation.address }}
            timeZone={organisation.timeZone}
            currency={organisation.currency}
            faultOf={(field) => faults.find((fault) => fault.field === field)?.message}
          />
          <p className="buttons">
            <Button type="submit" busy={form.busy}>
              Save, and go on to the prizes
            </Button>
            <Link to={drawsPath(slug)}>Back to the draws</Link>
          </p>
        </form>
      </Part>
    </>
  )
}
