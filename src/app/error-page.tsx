import { isRouteErrorResponse, useRouteError } from 'react-router'
import { problemSchema } from '#shared/schemas/problem.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { Title } from '#src/ui/page.tsx'
import { Head } from '#src/lib/head.tsx'
import { PublicSheet } from './public-page.tsx'

interface Failure {
  readonly title: string
  readonly detail: string
  readonly status: number
}

const UNKNOWN = {
  title: 'Something went wrong',
  detail: 'The site could not make this page. Try again in a moment.',
}
const NOWHERE =
  'The address may be mistyped, or the draw may not be public yet. Search for it by its title or its organisation.'

/** What the reader is told: what happened, and what to do. The same for an error before and after its way to the browser. */
export function failureWords(error: unknown): Failure {
  if (!isRouteErrorResponse(error)) return { ...UNKNOWN, status: 500 }
  const problem = problemSchema.safeParse(error.data)
  if (error.status === 404) {
    return { title: 'There is no such page', detail: problem.success ? problem.data.detail : NOWHERE, status: 404 }
  }
  if (problem.success) return { title: problem.data.title, detail: problem.data.detail, status: error.status }
  return { ...UNKNOWN, status: error.status }
}

/** The page for any failure, in the same sheet as the others. */
export function ErrorPage() {
  const failure = failureWords(useRouteError())
  return (
    <PublicSheet>
      <Head title={failure.title} description={failure.detail} />
      <Title
        title={failure.title}
        lead={failure.detail}
        stub={<p className="stub-facts mt-0">Status {failure.status}</p>}
      >
        <p className="buttons mt-unit-2">
          <ButtonLink to="/draws">Search the draws</ButtonLink>
          <ButtonLink to="/" quiet>
            Go to the first page
          </ButtonLink>
        </p>
      </Title>
    </PublicSheet>
  )
}
