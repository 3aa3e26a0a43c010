import type { ApiClient, CallInput, Endpoint, ResponseOf } from '#shared/schemas/endpoint.ts'
import { Problem, problemSchema, type ProblemDetails } from '#shared/schemas/problem.ts'

/** Calls the JSON API over fetch. Every failure, the network's too, is a {@link Problem} that says what to do. */
export function browserApiClient(fetchImplementation: typeof fetch = (...args) => fetch(...args)): ApiClient {
  return {
    async call<E extends Endpoint>(endpoint: E, input: CallInput<E> = {}): Promise<ResponseOf<E>> {
      const response = await send(fetchImplementation, endpoint, input)
      if (!response.ok) throw new Problem(await problemOf(response))
      const body: unknown = response.status === 204 ? {} : await response.json().catch(() => undefined)
      const parsed = endpoint.response.safeParse(body)
      if (!parsed.success) throw new Problem(unexpectedAnswer())
      return parsed.data as ResponseOf<E>
    },
  }
}

async function send<E extends Endpoint>(fetchImplementation: typeof fetch, endpoint: E, input: CallInput<E>) {
  const hasBody = input.body !== undefined
  try {
    return await fetchImplementation(endpointUrl(endpoint, input), {
      method: endpoint.method,
      credentials: 'same-origin',
      headers: { accept: 'application/json', ...(hasBody ? { 'content-type': 'application/json' } : {}) },
      ...(hasBody ? { body: JSON.stringify(input.body) } : {}),
    })
  } catch {
    throw new Problem(failure(0, 'No connection', 'The site could not be reached. Check the connection and try again.'))
  }
}

/** The address of a call: path parameters filled in, query appended. Throws where a parameter is missing. */
export function endpointUrl<E extends Endpoint>(endpoint: E, input: CallInput<E>): string {
  const params = (input.params ?? {}) as Record<string, unknown>
  const path = endpoint.path.replace(/:([A-Za-z]+)/g, (_, name: string) => {
    const value = params[name]
    if (value === undefined) throw new Error(`${endpoint.name} needs the parameter ${name}`)
    return encodeURIComponent(String(value))
  })
  const query = new URLSearchParams()
  for (const [name, value] of Object.entries((input.query ?? {}) as Record<string, unknown>)) {
    if (value !== undefined && value !== null && value !== '') query.set(name, String(value))
  }
  const search = query.toString()
  return search ? `${path}?${search}` : path
}

export function unexpectedAnswer(): ProblemDetails {
  return failure(
    502,
    'An answer nobody expected',
    'The site answered in a way that this page does not know. Load the page again: it may be older than the site.',
  )
}

async function problemOf(response: Response): Promise<ProblemDetails> {
  return problemFromBody(response.status, await response.json().catch(() => undefined))
}

/** The problem that a failed answer's body tells of, or plain words where it tells of none. */
export function problemFromBody(status: number, body: unknown): ProblemDetails {
  const parsed = problemSchema.safeParse(body)
  if (parsed.success) return parsed.data
  return failure(status, 'Something went wrong', 'The site could not answer. Try again in a moment.')
}

export function failure(status: number, title: string, detail: string): ProblemDetails {
  return { type: 'about:blank', title, status, detail }
}
