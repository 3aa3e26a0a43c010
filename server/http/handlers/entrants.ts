import { addEntrant } from '#server/commands/entrants/add-entrant.ts'
import { applyImport } from '#server/commands/entrants/apply-import.ts'
import { discardImport } from '#server/commands/entrants/discard-import.ts'
import { removeEntrant } from '#server/commands/entrants/remove-entrant.ts'
import { updateEntrant } from '#server/commands/entrants/update-entrant.ts'
import { uploadImport } from '#server/commands/entrants/upload-import.ts'
import { personOf } from '#server/http/endpoints/context.ts'
import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import { findEntrant, listEntrants } from '#server/store/queries/entrants.ts'
import { getImport, listImports } from '#server/store/queries/imports.ts'
import * as api from '#shared/schemas/api/office.ts'

/** The list of entrants of a draw, one by one and by files. */
export function entrantHandlers({ services }: HandlerParts): Handled[] {
  const { db } = services
  const row = async (draw: string, entrant: number) => found(await findEntrant(db, { draw, entrant }))
  const view = async (params: { readonly draw: string; readonly import: string }) => found(await getImport(db, params))
  return [
    handle(api.listEntrants, (_context, { params, query }) => listEntrants(db, { ...params, ...query })),
    handle(api.addEntrant, async (context, { params, body }) => {
      const { id } = await addEntrant(services, personOf(context), { draw: params.draw, entrant: body })
      return row(params.draw, id)
    }),
    handle(api.updateEntrant, async (context, { params, body: { version, ...values } }) => {
      const entrant = Number(params.entrant)
      await updateEntrant(services, personOf(context), { draw: params.draw, entrant, version, values })
      return row(params.draw, entrant)
    }),
    handle(api.removeEntrant, async (context, { params, body }) => {
      const entrant = Number(params.entrant)
      await removeEntrant(services, personOf(context), { draw: params.draw, entrant, reason: body.reason })
      return {}
    }),
    handle(api.uploadImport, async (context, { params }) => {
      const { upload } = context
      if (!upload) throw new Error('An import comes with its file.')
      const { fileName, bytesTotal, bytes, signal } = upload
      const input = { draw: params.draw, fileName, bytesTotal, stream: bytes, signal }
      const { id } = await uploadImport(services, personOf(context), input)
      return view({ draw: params.draw, import: id })
    }),
    handle(api.getImport, (_context, { params }) => view(params)),
    handle(api.applyImport, async (context, { params }) => {
      await applyImport(services, personOf(context), params)
      return view(params)
    }),
    handle(api.discardImport, async (context, { params }) => {
      await discardImport(services, personOf(context), params)
      return view(params)
    }),
    handle(api.listImports, (_context, { params }) => listImports(db, params.draw)),
  ]
}
