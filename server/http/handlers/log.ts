import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import { problem } from '#server/http/problems.ts'
import * as proofs from '#server/store/queries/log-proofs.ts'
import * as api from '#shared/schemas/api/log.ts'

/** The site's log: its head, its entries and its proofs, for everybody. */
export function logHandlers({ services }: HandlerParts): Handled[] {
  return [
    handle(api.getLogCheckpointV1, () => proofs.logHeadOf(services)),
    handle(api.listLogEntriesV1, (_context, { query }) => proofs.logEntries(services.db, query)),
    handle(api.getLogInclusionV1, async (_context, { query }) => known(await proofs.logInclusion(services, query))),
    handle(api.getLogConsistencyV1, async (_context, { query }) => known(await proofs.logConsistency(services, query))),
    handle(api.getLogState, () => proofs.logStateOf(services)),
    handle(api.getDrawLog, async (_context, { params }) => found(await proofs.drawLogOf(services, params.slug))),
  ]
}

/** A size beyond the end may come to be: it is not found yet, and nothing that may be kept. */
function known<T>(proof: T | null): T {
  if (proof !== null) return proof
  throw problem(404, 'The log has no such entry or size. Ask for its checkpoint to learn how many entries it has.')
}
