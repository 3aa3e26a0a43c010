import type { Endpoint } from '../endpoint.ts'
import * as administrator from './administrator.ts'
import * as entry from './entry.ts'
import * as log from './log.ts'
import * as office from './office.ts'
import * as publicPages from './public.ts'
import * as session from './session.ts'
import * as siteKeys from './site-keys.ts'
import * as publicApi from './v1.ts'

const isEndpoint = (value: unknown): value is Endpoint =>
  typeof value === 'object' && value !== null && 'method' in value && 'path' in value && 'response' in value

/** Every endpoint of the JSON API: the server refuses to start while one of them has no handler or no rule. */
export const allEndpoints: readonly Endpoint[] = [
  session,
  publicPages,
  entry,
  log,
  siteKeys,
  publicApi,
  office,
  administrator,
].flatMap((module) => Object.values(module as Record<string, unknown>).filter(isEndpoint))
