import { PasswordsBusyError } from '#server/adapters/passwords/passwords.ts'
import { CommandError, type CommandErrorCode } from '#server/commands/command-error.ts'
import { notFound, problem } from '#server/http/problems.ts'
import { refusalOf } from '#server/store/database.ts'
import { Problem } from '#shared/schemas/problem.ts'

/** Turns whatever was thrown into the Problem that its caller is told. */
export type ProblemOf = (error: unknown) => Problem

/** `onUnexpected` is told of what nobody foresaw, for the log: the caller learns nothing of it. */
export function createProblemOf(onUnexpected: (error: unknown) => void): ProblemOf {
  return (error) => {
    const expected = expectedProblem(error)
    if (expected) return expected
    onUnexpected(error)
    return problem(500, 'Something went wrong on our side. Nothing was changed. Try again in a moment.')
  }
}

const STATUS_OF: Readonly<Record<CommandErrorCode, number>> = {
  'not-found': 404,
  invalid: 422,
  changed: 409,
  refused: 409,
  expired: 410,
  'wrong-password': 422,
}

function expectedProblem(error: unknown): Problem | null {
  if (error instanceof Problem) return error
  if (error instanceof CommandError) {
    return problem(STATUS_OF[error.code], error.message, { code: error.code, errors: error.fields })
  }
  if (error instanceof PasswordsBusyError) return problem(503, error.message, { code: 'busy' })
  // EP001: a rule that the database itself keeps, whose message is a sentence for people.
  const refusal = refusalOf(error)
  if (refusal?.code === 'EP001') return problem(409, refusal.message, { code: 'refused' })
  return httpProblem(error)
}

/** What Express and its body parser throw (the `http-errors` shape) for requests that cannot be read. */
function httpProblem(error: unknown): Problem | null {
  if (error instanceof URIError) return problem(400, 'This address is not written correctly.')
  const { status, type } = (error ?? {}) as { status?: unknown; type?: unknown }
  if (typeof status !== 'number' || status < 400 || status > 499) return null
  if (status === 404) return notFound()
  switch (type) {
    case 'entity.too.large':
      return problem(413, 'This is more than the site takes in one request. Send it in smaller parts.')
    case 'entity.parse.failed':
      return problem(400, 'The body of this request is not JSON.')
    case 'encoding.unsupported':
    case 'charset.unsupported':
      return problem(415, 'The body of this request is written in an encoding that the site does not read. Use UTF-8.')
    case 'request.aborted':
    case 'request.size.invalid':
      return problem(400, 'The request broke off before its end. Nothing was changed. Try again.')
    default:
      return problem(status, 'This request cannot be read.')
  }
}
