import { STATUS_CODES } from 'node:http'
import type { z } from 'zod'
import { Problem, type ProblemDetails } from '#shared/schemas/problem.ts'

export interface FieldError {
  readonly field: string
  readonly message: string
}

/**
 * An RFC 9457 problem. `code` becomes its type (`/problems/<code>`); without one the type is `about:blank`, which says no
 * more than the status does.
 */
export function problem(
  status: number,
  detail: string,
  more: { readonly code?: string; readonly title?: string; readonly errors?: readonly FieldError[] } = {},
): Problem {
  const details: ProblemDetails = {
    type: more.code ? `/problems/${more.code}` : 'about:blank',
    title: more.title ?? STATUS_CODES[status] ?? 'Error',
    status,
    detail,
  }
  return new Problem(more.errors?.length ? { ...details, errors: [...more.errors] } : details)
}

export const notFound = () => problem(404, 'There is nothing at this address.')

/** Fields at fault, named as RFC 6901 pointers without the leading slash. */
export function invalidFields(error: z.ZodError, status: 400 | 422): Problem {
  const errors = fieldErrors(error)
  const detail = errors.length === 1 ? 'One field needs another look.' : `${errors.length} fields need another look.`
  return problem(status, detail, { code: 'invalid-fields', title: 'Some fields are not right', errors })
}

export function fieldErrors(error: z.ZodError): FieldError[] {
  const seen = new Set<string>()
  const errors: FieldError[] = []
  for (const issue of error.issues) {
    const field = issue.path.map((part) => String(part).replace(/~/g, '~0').replace(/\//g, '~1')).join('/')
    if (seen.has(field)) continue
    seen.add(field)
    errors.push({ field, message: issue.message })
  }
  return errors
}

/** Sentences for what zod finds where the schema brings no words of its own. */
export function plainWords(issue: z.core.$ZodRawIssue): string | undefined {
  switch (issue.code) {
    case 'invalid_type':
      if (issue.input === undefined || issue.input === null) return 'Fill this in.'
      if (issue.expected === 'number' || issue.expected === 'int') return 'Type a whole number.'
      if (issue.expected === 'string') return 'This must be text.'
      if (issue.expected === 'array') return 'This must be a list.'
      if (issue.expected === 'object') return 'This must be an object with named fields.'
      return `This must be of another kind (${issue.expected}).`
    case 'too_big':
      return issue.origin === 'string'
        ? `Use at most ${issue.maximum} characters.`
        : issue.origin === 'array'
          ? `Give at most ${issue.maximum}.`
          : `The highest value is ${issue.maximum}.`
    case 'too_small':
      return issue.origin === 'string'
        ? `Use at least ${issue.minimum} characters.`
        : issue.origin === 'array'
          ? `Give at least ${issue.minimum}.`
          : `The lowest value is ${issue.minimum}.`
    case 'invalid_value':
      return `Choose one of: ${issue.values.map(String).join(', ')}.`
    case 'invalid_format':
      return 'This is not written in the form that is wanted here.'
    case 'invalid_union':
      return 'This is not one of the values that are wanted here.'
    case 'unrecognized_keys':
      return `Leave out ${issue.keys.join(', ')}.`
    default:
      return undefined
  }
}
