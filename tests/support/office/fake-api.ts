import type { ApiClient, CallInput, Endpoint, ResponseOf } from '#shared/schemas/endpoint.ts'
import { Problem } from '#shared/schemas/problem.ts'

type Answer = (input: { readonly params: never; readonly query: never; readonly body: never }) => unknown

export interface FakeApi extends ApiClient {
  /** Every call so far, in order. */
  readonly calls: readonly { readonly name: string; readonly input: Record<string, unknown> }[]
  /** The inputs of the calls of one endpoint. */
  of(name: string): readonly Record<string, unknown>[]
}

/**
 * Answers endpoints by their names. Every answer goes through the endpoint's own schema, as the browser's do, so that a
 * fixture which the server could never send fails the test.
 */
export function fakeApi(answers: Readonly<Record<string, Answer>>): FakeApi {
  const calls: { name: string; input: Record<string, unknown> }[] = []
  return {
    calls,
    of: (name) => calls.filter((call) => call.name === name).map((call) => call.input),
    async call<E extends Endpoint>(endpoint: E, input: CallInput<E> = {}): Promise<ResponseOf<E>> {
      calls.push({ name: endpoint.name, input: input as Record<string, unknown> })
      const answer = answers[endpoint.name]
      if (!answer) throw new Error(`the test has no answer for ${endpoint.name}`)
      return endpoint.response.parse(await answer(input as never)) as ResponseOf<E>
    },
  }
}

/** A refusal as the server writes it. */
export function refusal(
  status: number,
  detail: string,
  more: { readonly code?: string; readonly errors?: readonly { field: string; message: string }[] } = {},
): Problem {
  return new Problem({
    type: more.code ? `/problems/${more.code}` : 'about:blank',
    title: 'Refused',
    status,
    detail,
    ...(more.errors ? { errors: [...more.errors] } : {}),
  })
}
