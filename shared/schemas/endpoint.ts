import type { z } from 'zod'

export type Method = 'GET' | 'POST' | 'PUT' | 'PATCH' | 'DELETE'

/**
 * One call of the JSON API, described once: the server mounts and parses it, the browser and the server renderer call
 * it, and the public description is made from it. `path` is Express's notation (`/api/draws/:slug`).
 */
export interface Endpoint<
  Params extends z.ZodType = z.ZodType,
  Query extends z.ZodType = z.ZodType,
  Body extends z.ZodType = z.ZodType,
  Response extends z.ZodType = z.ZodType,
> {
  readonly name: string
  readonly method: Method
  readonly path: string
  readonly summary: string
  readonly params: Params
  readonly query: Query
  readonly body: Body
  readonly response: Response
}

export type ParamsOf<E extends Endpoint> = z.output<E['params']>
export type QueryOf<E extends Endpoint> = z.output<E['query']>
export type BodyOf<E extends Endpoint> = z.output<E['body']>
export type ResponseOf<E extends Endpoint> = z.output<E['response']>

/** What a caller passes: only what the endpoint takes. */
export interface CallInput<E extends Endpoint> {
  readonly params?: z.input<E['params']>
  readonly query?: z.input<E['query']>
  readonly body?: z.input<E['body']>
}

/** Calls an endpoint: over HTTP in the browser, in process on the server. Fails with a {@link Problem}. */
export interface ApiClient {
  call<E extends Endpoint>(endpoint: E, input?: CallInput<E>): Promise<ResponseOf<E>>
}
