import { isRouteErrorResponse, useRouteError } from 'react-router'
import { problemSchema } from '#shared/schemas/problem.ts'
import { Head } from '#src/lib/head.tsx'
import { ButtonLink } from '#src/ui/button.tsx'
import { Title } from '#src/ui/page.tsx'

/** The plain page for a link or a code that fits nobody, and for a page that cannot be made at the moment. */
export function ErrorBoundary() {
  const error = useRouteError()
  const problem = isRouteErrorResponse(error) ? problemSchema.safeParse(error.data) : null
  const title = problem?.success ? problem.data.title : 'Something went wrong'
  const detail = problem?.success ? problem.data.detail : 'The site could not make this page. Try again in a moment.'
  return (
    <>
      <Head title={title} description="A private page of one entrant." />
      <Title title={title} lead={detail}>
        <p className="buttons mt-unit-2">
          <ButtonLink to="/entry">Have my link sent again, or type a code</ButtonLink>
          <ButtonLink to="/draws" quiet>
            Search the draws
          </ButtonLink>
        </p>
      </Title>
    </>
  )
}
