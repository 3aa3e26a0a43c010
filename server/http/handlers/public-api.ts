import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import { inclusionOf } from '#server/store/queries/leaf-proofs.ts'
import * as queries from '#server/store/queries/public-api.ts'
import * as api from '#shared/schemas/api/v1.ts'

/** What programs of other people read. */
export function publicApiHandlers({ services }: HandlerParts): Handled[] {
  const { db } = services
  return [
    handle(api.listDrawsV1, (_context, { query }) => queries.listDraws(services, query)),
    handle(api.getDrawV1, async (_context, { params }) => found(await queries.drawDetail(services, params.slug))),
    handle(api.getSealInForceV1, async (_context, { params }) => found(await queries.sealInForceOf(db, params.slug))),
    handle(api.getSealV1, async (_context, { params }) => found(await queries.sealByDigest(db, params.seal))),
    handle(api.getInclusionV1, async (_context, { params }) => {
      const proof = found(await inclusionOf(services, params))
      return { ...proof, path: [...proof.path] }
    }),
    handle(api.getResultV1, async (_context, { params, query }) =>
      found(await queries.resultPage(db, { slug: params.slug, page: query.page })),
    ),
    handle(api.listTranscriptV1, async (_context, { params, query }) =>
      found(await queries.transcriptPage(db, { slug: params.slug, page: query.page })),
    ),
  ]
}
