import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import * as cards from '#server/store/queries/draw-cards.ts'
import * as drawPages from '#server/store/queries/draw-page.ts'
import * as log from '#server/store/queries/log.ts'
import { getDrawOdds } from '#server/store/queries/odds.ts'
import { getStatistics } from '#server/store/queries/statistics.ts'
import * as organisations from '#server/store/queries/organisations.ts'
import { getSiteKeys } from '#server/store/queries/site-keys.ts'
import { getSiteKeys as getSiteKeysEndpoint } from '#shared/schemas/api/site-keys.ts'
import * as api from '#shared/schemas/api/public.ts'

/** What everybody may read. */
export function publicHandlers({ services }: HandlerParts): Handled[] {
  const { db } = services
  return [
    handle(getSiteKeysEndpoint, () => getSiteKeys(services)),
    handle(api.getHome, () => cards.getHome(db)),
    handle(api.searchDraws, (_context, { query }) => cards.searchDraws(db, query)),
    handle(api.getDraw, async (_context, { params }) => found(await drawPages.getDraw(services, params.slug))),
    handle(api.getPick, async (_context, { params }) => found(await drawPages.getPick(services, params))),
    handle(api.getDrawOdds, async (_context, { params, query }) =>
      found(await getDrawOdds(services, { ...params, ...query })),
    ),
    handle(api.getStatistics, () => getStatistics(services)),
    handle(api.listOrganisations, (_context, { query }) => organisations.listOrganisations(db, query)),
    handle(api.getOrganisation, async (_context, { params }) =>
      found(await organisations.getOrganisation(db, params.slug)),
    ),
    handle(api.getLog, (_context, { query }) => log.getLog(db, query)),
  ]
}
