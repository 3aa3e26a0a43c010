import { invitePerson } from '#server/commands/people/invite-person.ts'
import { removePerson } from '#server/commands/people/remove-person.ts'
import { revokeInvitation } from '#server/commands/people/revoke-invitation.ts'
import { nameWitness } from '#server/commands/witnesses/name-witness.ts'
import { removeWitness } from '#server/commands/witnesses/remove-witness.ts'
import { stateAsWitness } from '#server/commands/witnesses/state-as-witness.ts'
import { permissionsOn } from '#server/http/authorisation/decide.ts'
import { personOf, resourceOf } from '#server/http/endpoints/context.ts'
import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { officeView } from '#server/http/handlers/office-draws.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import { findInvitation, listPeople } from '#server/store/queries/people.ts'
import * as api from '#shared/schemas/api/office.ts'

/** An organisation's people, and the witnesses of its draws. */
export function peopleHandlers({ services }: HandlerParts): Handled[] {
  const view = officeView(services)
  return [
    handle(api.listPeople, async (context, { params }) => {
      const may = permissionsOn(['manage-people'], context.actor, resourceOf(context))
      return { ...found(await listPeople(services, params.organisation)), may: { change: may['manage-people'] } }
    }),
    handle(api.invitePerson, async (context, { params, body }) => {
      const { id } = await invitePerson(services, personOf(context), { ...params, ...body })
      return found(await findInvitation(services.db, id))
    }),
    handle(api.revokeInvitation, async (context, { params }) => {
      await revokeInvitation(services, personOf(context), params)
      return {}
    }),
    handle(api.removePerson, async (context, { params }) => {
      await removePerson(services, personOf(context), params)
      return {}
    }),
    handle(api.nameWitness, async (context, { params, body }) => {
      await nameWitness(services, personOf(context), { ...params, ...body })
      return view(context, params.draw)
    }),
    handle(api.removeWitness, async (context, { params }) => {
      await removeWitness(services, personOf(context), params)
      return view(context, params.draw)
    }),
    handle(api.stateAsWitness, async (context, { params, body }) => {
      await stateAsWitness(services, personOf(context), { ...params, ...body })
      return view(context, params.draw)
    }),
  ]
}
