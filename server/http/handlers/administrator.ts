import { retryJob } from '#server/commands/jobs/retry-job.ts'
import { changeOrganisationState } from '#server/commands/organisations/change-organisation-state.ts'
import { createOrganisation } from '#server/commands/organisations/create-organisation.ts'
import { updateOrganisation } from '#server/commands/organisations/update-organisation.ts'
import { invitePerson } from '#server/commands/people/invite-person.ts'
import { sendPasswordReset } from '#server/commands/people/request-password-reset.ts'
import { personOf } from '#server/http/endpoints/context.ts'
import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import {
  findOrganisationRow,
  getOrganisationForAdministrator,
  getSiteState,
  listAllOrganisations,
} from '#server/store/queries/administrator.ts'
import { getAudit } from '#server/store/queries/audit.ts'
import { findInvitation } from '#server/store/queries/people.ts'
import * as api from '#shared/schemas/api/administrator.ts'

/** The site's own office: organisations, people, the state of everything. No entrants, no seals, no results. */
export function administratorHandlers({ services }: HandlerParts): Handled[] {
  const { db } = services
  const row = async (slug: string) => found(await findOrganisationRow(db, slug))
  return [
    handle(api.listAllOrganisations, (_context, { query }) => listAllOrganisations(db, query)),
    handle(api.createOrganisation, async (context, { body }) => {
      const { slug } = await createOrganisation(services, personOf(context), body)
      return row(slug)
    }),
    handle(api.getOrganisationForAdministrator, async (_context, { params }) =>
      found(await getOrganisationForAdministrator(services, params.organisation)),
    ),
    handle(api.updateOrganisation, async (context, { params, body: { version, ...values } }) => {
      await updateOrganisation(services, personOf(context), { ...params, version, values })
      return row(params.organisation)
    }),
    handle(api.changeOrganisationState, async (context, { params, body }) => {
      await changeOrganisationState(services, personOf(context), { ...params, ...body })
      return row(params.organisation)
    }),
    handle(api.inviteForAdministrator, async (context, { params, body }) => {
      const { id } = await invitePerson(services, personOf(context), { ...params, ...body })
      return found(await findInvitation(db, id))
    }),
    handle(api.sendPasswordReset, async (context, { params }) => {
      await sendPasswordReset(services, personOf(context), params)
      return {}
    }),
    handle(api.getSiteState, () => getSiteState(services)),
    handle(api.retryJob, async (context, { params }) => {
      await retryJob(services, personOf(context), params)
      return {}
    }),
    handle(api.getAudit, (_context, { query }) => getAudit(db, query)),
  ]
}
