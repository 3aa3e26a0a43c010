import type { ErrorRequestHandler, Request, RequestHandler, Response } from 'express'
import { plainPage } from '#server/http/pages/plain-page.ts'
import type { ProblemOf } from '#server/http/problem-of.ts'
import { notFound } from '#server/http/problems.ts'
import { retryAfter } from '#server/http/session/sign-in-limits.ts'
import type { Problem } from '#shared/schemas/problem.ts'

/** For API addresses and methods that nothing answers. */
export const noSuchEndpoint: RequestHandler = (_request, _response, next) => next(notFound())

/** The last handler: RFC 9457 problem details for programs, a plain page for people. */
export function errorHandler(problemOf: ProblemOf): ErrorRequestHandler {
  return (error: unknown, request, response, next) => {
    const problem = problemOf(error)
    if (response.headersSent) {
      // Half an answer is out: only breaking off tells the receiver that it is not whole.
      response.destroy()
      return
    }
    clearHeaders(response)
    sendProblem(problem, request, response)
    void next
  }
}

function sendProblem(problem: Problem, request: Request, response: Response): void {
  const { details } = problem
  const wait = retryAfter(problem)
  if (wait !== null) response.setHeader('Retry-After', String(wait))
  // RFC 9110, 15.5.2: a 401 names a way in. No browser knows this one, so none opens a window of its own.
  if (details.status === 401) response.setHeader('WWW-Authenticate', 'Session realm="Evenpenny"')
  response.setHeader('Cache-Control', 'no-store')
  response.status(details.status)
  if (wantsPage(request)) {
    response
      .type('html')
      .send(plainPage(details.status, details.detail, String(response.getHeader('X-Request-Id') ?? '')))
  } else {
    response.setHeader('Content-Type', 'application/problem+json; charset=utf-8')
    response.send(JSON.stringify({ ...details, instance: request.path }))
  }
}

function wantsPage(request: Request): boolean {
  return !request.path.startsWith('/api/') && request.accepts(['json', 'html']) === 'html'
}

/** What an unfinished answer had already set about its body. */
function clearHeaders(response: Response): void {
  for (const name of ['Content-Length', 'Content-Disposition', 'Content-Encoding', 'ETag', 'Last-Modified']) {
    response.removeHeader(name)
  }
}
