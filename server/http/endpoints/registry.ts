import type { z } from 'zod'
import { type Decision, decide, type Rule } from '#server/http/authorisation/decide.ts'
import type { Resource } from '#server/http/authorisation/actor.ts'
import type { CallContext, RequestContext, Upload } from '#server/http/endpoints/context.ts'
import { invalidFields, notFound, plainWords, problem } from '#server/http/problems.ts'
import type { BodyOf, Endpoint, ParamsOf, QueryOf, ResponseOf } from '#shared/schemas/endpoint.ts'

type Output = Endpoint['response']

export interface Handled {
  readonly endpoint: Endpoint
  readonly run: (context: CallContext, input: Parsed) => Promise<unknown>
}

interface Parsed {
  readonly params: unknown
  readonly query: unknown
  readonly body: unknown
}

/** An endpoint and what answers it. The answer is stripped to what the endpoint's response schema names. */
export function handle<E extends Endpoint>(
  endpoint: E,
  handler: (
    context: CallContext,
    input: { readonly params: ParamsOf<E>; readonly query: QueryOf<E>; readonly body: BodyOf<E> },
  ) => Promise<z.input<E['response']>>,
): Handled {
  // The registry parses each input with the endpoint's own schemas before it calls this.
  return { endpoint, run: handler as Handled['run'] }
}

/** What comes in from outside, not yet parsed. */
export interface RawInput {
  readonly params: unknown
  readonly query: unknown
  readonly body: unknown
}

/** Finds what a call is about from its path parameters; null where there is no such organisation or draw. */
export type FindResource = (on: 'organisation' | 'draw', key: string) => Promise<Resource | null>

/** Every endpoint with its rule and handler: the one way in, over HTTP and in process. */
export interface Registry {
  readonly endpoints: readonly Endpoint[]
  ruleOf(endpoint: Endpoint): Rule
  /** Whether a call is allowed. Throws the Problem of malformed parameters. For uploads, before their body is read. */
  authorise(endpoint: Endpoint, context: RequestContext, params: unknown): Promise<void>
  /** Parses, authorises, runs and strips. Throws a Problem, or whatever the handler threw. */
  call<E extends Endpoint>(
    endpoint: E,
    context: RequestContext,
    input: RawInput,
    upload?: Upload,
  ): Promise<ResponseOf<E>>
}

/**
 * Throws where an endpoint has no handler or no rule, where a handler or a rule names no endpoint, and where one is
 * handled twice: the application then does not start.
 */
export function createRegistry(
  endpoints: readonly Endpoint[],
  rules: Readonly<Record<string, Rule>>,
  handlers: readonly Handled[],
  findResource: FindResource,
): Registry {
  const byName = new Map<string, { handled: Handled; rule: Rule }>()
  const names = new Set(endpoints.map(({ name }) => name))
  const faults: string[] = []
  if (names.size !== endpoints.length) faults.push('Two endpoints have the same name.')
  for (const handled of handlers) {
    const { name } = handled.endpoint
    if (!names.has(name)) faults.push(`The handler of ${name} belongs to no endpoint.`)
    if (byName.has(name)) faults.push(`${name} has two handlers.`)
    const rule = rules[name]
    if (!rule) faults.push(`${name} has no rule in the authorisation module.`)
    else byName.set(name, { handled, rule })
  }
  for (const name of Object.keys(rules)) if (!names.has(name)) faults.push(`The rule ${name} belongs to no endpoint.`)
  for (const name of names)
    if (!handlers.some(({ endpoint }) => endpoint.name === name)) faults.push(`${name} has no handler.`)
  if (faults.length > 0) throw new Error(`The API does not hold together. ${faults.join(' ')}`)

  const find = (endpoint: Endpoint) => {
    const found = byName.get(endpoint.name)
    if (!found) throw new Error(`${endpoint.name} is not an endpoint of this application.`)
    return found
  }

  const allow = async (endpoint: Endpoint, context: RequestContext, params: unknown): Promise<Resource | null> => {
    const { rule } = find(endpoint)
    // Visitors are told to sign in before anything is looked up.
    const first = rule.on === 'site' || !context.actor.person ? decide(rule, context.actor, null) : null
    if (first) return throwUnless(first, null)
    const resource = await findResource(rule.on as 'organisation' | 'draw', keyOf(rule, params))
    return throwUnless(decide(rule, context.actor, resource), resource)
  }

  return {
    endpoints,
    ruleOf: (endpoint) => find(endpoint).rule,
    async authorise(endpoint, context, params) {
      await allow(endpoint, context, parseParams(endpoint, params))
    },
    async call(endpoint, context, input, upload) {
      const { handled } = find(endpoint)
      const params = parseParams(endpoint, input.params)
      const resource = await allow(endpoint, context, params)
      const query = parse(endpoint.query, input.query ?? {}, 400)
      const body = parse(endpoint.body, input.body ?? {}, 422)
      const answer = await handled.run({ ...context, resource, upload: upload ?? null }, { params, query, body })
      const stripped = endpoint.response.safeParse(answer)
      if (stripped.success) return stripped.data as never
      throw new Error(`The answer of ${endpoint.name} does not fit its description: ${stripped.error.message}`)
    },
  }
}

function throwUnless(decision: Decision, resource: Resource | null): Resource | null {
  if (decision.allowed) return resource
  throw problem(decision.status, decision.reason)
}

function keyOf(rule: Rule, params: unknown): string {
  const key = (params as Record<string, unknown>)[rule.on]
  if (typeof key !== 'string') throw new Error(`A rule on a ${rule.on} needs the path parameter :${rule.on}.`)
  return key
}

function parseParams(endpoint: Endpoint, params: unknown): unknown {
  const parsed = endpoint.params.safeParse(params ?? {})
  // A malformed id or slug cannot name anything.
  if (!parsed.success) throw notFound()
  return parsed.data
}

function parse<T extends Output>(schema: T, value: unknown, status: 400 | 422): z.output<T> {
  const parsed = schema.safeParse(value, { error: plainWords })
  if (!parsed.success) throw invalidFields(parsed.error, status)
  return parsed.data
}
