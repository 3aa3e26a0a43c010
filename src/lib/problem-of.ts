import { Problem, problemSchema, type ProblemDetails } from '#shared/schemas/problem.ts'

/**
 * The problem details that an error carries, or null. Told by shape on the server, where the rendering bundle and the
 * server that calls it each have a Problem class of their own.
 */
export function problemOf(error: unknown): ProblemDetails | null {
  if (error instanceof Problem) return error.details
  if (!(error instanceof Error) || !('details' in error)) return null
  const parsed = problemSchema.safeParse(error.details)
  return parsed.success ? parsed.data : null
}
