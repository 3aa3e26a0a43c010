import type { z } from 'zod'
import type { Endpoint } from './endpoint.ts'

/**
 * An endpoint that programs of other people read: no session, GET only, open to every origin, and kept stable. `caching`
 * says whether its answer can ever change under its address.
 */
export interface PublicEndpoint<
  Params extends z.ZodType = z.ZodType,
  Query extends z.ZodType = z.ZodType,
  Response extends z.ZodType = z.ZodType,
> extends Endpoint<Params, Query, z.ZodType, Response> {
  readonly method: 'GET'
  readonly caching: 'immutable' | 'revalidate'
  /** Sentences for the public description, after the summary. */
  readonly description: string
  /** A whole call that fits the schemas. */
  readonly example: {
    readonly params: Readonly<Record<string, string | number>>
    readonly query: Readonly<Record<string, string | number>>
    readonly response: unknown
  }
}

export const PUBLIC_API = '/api/v1'

export const isPublicEndpoint = (endpoint: Endpoint): endpoint is PublicEndpoint => 'caching' in endpoint
