import type { Handled } from '#server/http/endpoints/registry.ts'
import { administratorHandlers } from '#server/http/handlers/administrator.ts'
import { entrantHandlers } from '#server/http/handlers/entrants.ts'
import { entryHandlers } from '#server/http/handlers/entries.ts'
import { logHandlers } from '#server/http/handlers/log.ts'
import { officeDrawHandlers } from '#server/http/handlers/office-draws.ts'
import type { HandlerParts } from '#server/http/handlers/parts.ts'
import { peopleHandlers } from '#server/http/handlers/people.ts'
import { publicApiHandlers } from '#server/http/handlers/public-api.ts'
import { publicHandlers } from '#server/http/handlers/public.ts'
import { sessionHandlers } from '#server/http/handlers/session.ts'

/** What answers every endpoint. */
export function createHandlers(parts: HandlerParts): Handled[] {
  return [
    ...sessionHandlers(parts),
    ...publicHandlers(parts),
    ...logHandlers(parts),
    ...publicApiHandlers(parts),
    ...officeDrawHandlers(parts),
    ...entrantHandlers(parts),
    ...entryHandlers(parts),
    ...peopleHandlers(parts),
    ...administratorHandlers(parts),
  ]
}
