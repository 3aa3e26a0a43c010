import type { Express, Request, Response } from 'express'
import { receiptBytes, shortProof } from '#shared/protocol/receipt.ts'
import { noteReceiptOpened } from '#server/commands/entries/note-receipt-opened.ts'
import { createEntryGate } from '#server/http/handlers/entry-gate.ts'
import { keepPrivate } from '#server/http/middleware/private-pages.ts'
import { problem } from '#server/http/problems.ts'
import type { EntryGuard } from '#server/http/session/entry-limits.ts'
import type { Services } from '#server/services.ts'
import { receiptOf, sealedEntryOf } from '#server/store/queries/entry-receipt.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'

/** Puts an entrant's receipt and the short proof made of it beside their private page (PROTOCOL section 10). */
export function mountEntryFiles(app: Express, services: Services, guard: EntryGuard): void {
  const gate = createEntryGate(services, guard)
  const send = async (request: Request, response: Response, short: boolean) => {
    const { drawId, entrantId } = await gate(request.ip ?? '', String(request.params.token))
    const seal = sealInForce(await sealsOf(services.db, drawId))
    const sealed = seal ? await sealedEntryOf(services.db, seal.id, entrantId) : null
    if (!seal || !sealed) throw problem(404, 'There is no receipt yet: it is made when the list is sealed.')
    const receipt = await receiptOf(services, seal, sealed)
    if (!receipt) throw problem(410, 'The key that receipts of this draw were made with is destroyed.')
    if (!short) await noteReceiptOpened(services, { draw: drawId, entrant: entrantId })
    response.setHeader('Content-Type', 'application/json')
    response.setHeader('Content-Disposition', `attachment; filename="${short ? 'short-proof' : 'receipt'}.json"`)
    response.end(receiptBytes(short ? shortProof(services.sha256, receipt) : receipt))
  }
  app.get('/entry/:token/receipt.json', keepPrivate, (request, response) => send(request, response, false))
  app.get('/entry/:token/short-proof.json', keepPrivate, (request, response) => send(request, response, true))
}
