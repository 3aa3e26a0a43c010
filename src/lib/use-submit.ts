import { useMutation } from '@tanstack/react-query'
import { useMemo } from 'react'
import type { z } from 'zod'
import type { CallInput, Endpoint, ResponseOf } from '#shared/schemas/endpoint.ts'
import { Problem, type ProblemDetails } from '#shared/schemas/problem.ts'
import { useApp } from './app-context.ts'

export interface FieldFault {
  readonly field: string
  readonly message: string
}

export interface Submission<E extends Endpoint> {
  readonly busy: boolean
  /** What the form as a whole was told; undefined where only single fields are at fault. */
  readonly detail: string | undefined
  readonly faults: readonly FieldFault[]
  readonly failed: boolean
  /** The status of the last failure; null where there is none. */
  readonly status: number | null
  /** Whether somebody else changed the same thing since it was read: not refused for good, but to be looked at again. */
  readonly changed: boolean
  /** The message for one field, where it has one. */
  faultOf(field: string): string | undefined
  submit(input: CallInput<E>): void
  reset(): void
}

/**
 * Sends a form's input to an endpoint. The input is first held against the endpoint's own schema, so that mistakes show
 * at once and in the same words; what the server finds comes back on the same fields. Nothing typed is touched.
 */
export function useSubmit<E extends Endpoint>(
  endpoint: E,
  onDone: (answer: ResponseOf<E>, input: CallInput<E>) => unknown,
): Submission<E> {
  const { api } = useApp()
  const mutation = useMutation<ResponseOf<E>, Error, CallInput<E>>({
    mutationFn: async (input) => {
      const parsed = endpoint.body.safeParse(input.body ?? {})
      if (!parsed.success) throw new Problem(problemFrom(parsed.error))
      return api.call(endpoint, input)
    },
    onSuccess: (answer, input) => onDone(answer, input),
  })
  const problem = useMemo(() => (mutation.error ? detailsOf(mutation.error) : null), [mutation.error])
  const faults = useMemo(() => problem?.errors ?? [], [problem])
  return {
    busy: mutation.isPending,
    detail: problem && faults.length === 0 ? problem.detail : undefined,
    faults,
    failed: problem !== null,
    status: problem?.status ?? null,
    changed: problem?.type === '/problems/changed',
    faultOf: (field) => faults.find((fault) => fault.field === field)?.message,
    submit: (input) => {
      if (!mutation.isPending) mutation.mutate(input)
    },
    reset: mutation.reset,
  }
}

/** The failure of a call in words for people. */
export function detailsOf(error: Error): ProblemDetails {
  if (error instanceof Problem) return error.details
  return {
    type: 'about:blank',
    title: 'Something went wrong',
    status: 0,
    detail: 'Something went wrong in this page. Load it again and try once more.',
  }
}

/** A schema's complaints as problem details: one for each field, the first that it has. */
export function problemFrom(error: z.ZodError): ProblemDetails {
  const errors: FieldFault[] = []
  for (const issue of error.issues) {
    const field = issue.path.join('.')
    if (!errors.some((known) => known.field === field)) errors.push({ field, message: issue.message })
  }
  return {
    type: 'about:blank',
    title: 'Something needs putting right',
    status: 422,
    detail: 'Look at the fields that are marked.',
    errors,
  }
}
