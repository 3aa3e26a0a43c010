import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { closeDraw } from '#server/commands/draws/close-draw.ts'
import { createDraw } from '#server/commands/draws/create-draw.ts'
import { openDraw } from '#server/commands/draws/open-draw.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { putPrizes } from '#server/commands/draws/put-prizes.ts'
import { reopenDraw } from '#server/commands/draws/reopen-draw.ts'
import { sealDraw } from '#server/commands/draws/seal-draw.ts'
import { updateDraw } from '#server/commands/draws/update-draw.ts'
import type { Resource } from '#server/http/authorisation/actor.ts'
import { permissionsOn, seesOnlyWitnessedDraws } from '#server/http/authorisation/decide.ts'
import { type CallContext, personOf, resourceOf } from '#server/http/endpoints/context.ts'
import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import { getAudit } from '#server/store/queries/audit.ts'
import { getOfficeDraw, listOfficeDraws } from '#server/store/queries/office-draws.ts'
import { getOfficeOdds } from '#server/store/queries/odds.ts'
import { getSealSummary } from '#server/store/queries/seal-summary.ts'
import * as api from '#shared/schemas/api/office.ts'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'

/** An organisation's draws, from the first line of a draft to the seal. */
export function officeDrawHandlers({ services }: HandlerParts): Handled[] {
  const view = officeView(services)
  /** Runs a command on the draw of the path, then shows the draw as it is now. */
  const changing =
    <Input extends { readonly params: { readonly draw: string }; readonly body: object }>(
      run: (context: CallContext, input: Input) => Promise<unknown>,
    ) =>
    async (context: CallContext, input: Input): Promise<OfficeDraw> => {
      await run(context, input)
      return view(context, input.params.draw)
    }
  return [
    handle(api.listOfficeDraws, async (context, { params }) =>
      found(
        await listOfficeDraws(services, {
          organisation: params.organisation,
          ...(seesOnlyWitnessedDraws(context.actor, resourceOf(context)) ? { witnessedBy: personOf(context).id } : {}),
        }),
      ),
    ),
    handle(api.createDraw, async (context, { params, body }) => {
      const { id } = await createDraw(services, personOf(context), { organisation: params.organisation, draw: body })
      // Whoever makes a draw has just been found to be an organiser or promoter of its organisation.
      return view({ ...context, resource: drawIn(resourceOf(context), id) }, id)
    }),
    handle(api.getOfficeDraw, (context, { params }) => view(context, params.draw)),
    handle(
      api.updateDraw,
      changing((context, { params, body: { version, ...values } }) =>
        updateDraw(services, personOf(context), { draw: params.draw, version, values }),
      ),
    ),
    handle(
      api.putPrizes,
      changing((context, { params, body }) => putPrizes(services, personOf(context), { ...params, ...body })),
    ),
    handle(
      api.openDraw,
      changing((context, { params, body }) => openDraw(services, personOf(context), { ...params, ...body })),
    ),
    handle(
      api.closeDraw,
      changing((context, { params, body }) => closeDraw(services, personOf(context), { ...params, ...body })),
    ),
    handle(
      api.reopenDraw,
      changing((context, { params, body }) => reopenDraw(services, personOf(context), { ...params, ...body })),
    ),
    handle(api.getSealSummary, async (_context, { params }) => found(await getSealSummary(services, params.draw))),
    handle(api.getOfficeOdds, async (_context, { params, query }) =>
      found(await getOfficeOdds(services, { ...params, ...query })),
    ),
    handle(
      api.sealDraw,
      changing((context, { params, body: { version, entrants, tickets } }) =>
        sealDraw(services, personOf(context), { draw: params.draw, version, entrants, tickets }),
      ),
    ),
    handle(
      api.postponeDraw,
      changing((context, { params, body }) => postponeDraw(services, personOf(context), { ...params, ...body })),
    ),
    handle(
      api.cancelDraw,
      changing((context, { params, body }) => cancelDraw(services, personOf(context), { ...params, ...body })),
    ),
    handle(api.getDrawAudit, (_context, { params, query }) => getAudit(services.db, { ...query, draw: params.draw })),
  ]
}

/** Shows a draw to whoever asks, with what they may do with it: decided by the module that decides the routes. */
export function officeView(services: HandlerParts['services']) {
  return async (context: CallContext, draw: string): Promise<OfficeDraw> => {
    const rights = permissionsOn(['edit', 'run', 'witness'], context.actor, resourceOf(context))
    return found(await getOfficeDraw(services, { draw, rights }))
  }
}

const drawIn = ({ organisation }: Resource, id: string): Resource => ({ organisation, draw: { id, witnesses: [] } })
