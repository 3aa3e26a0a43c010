import { setTimeout as wait } from 'node:timers/promises'
import { readSlipCode } from '#shared/entrants/slip-code.ts'
import { answerCorrection } from '#server/commands/entries/answer-correction.ts'
import { askCorrection } from '#server/commands/entries/ask-correction.ts'
import { chooseAnnouncement } from '#server/commands/entries/choose-announcement.ts'
import { noteReceiptOpened } from '#server/commands/entries/note-receipt-opened.ts'
import { printSlips } from '#server/commands/entries/print-slips.ts'
import { requestEntryLink, sendEntryLink } from '#server/commands/entries/send-entry-link.ts'
import { permissionsOn } from '#server/http/authorisation/decide.ts'
import { type CallContext, personOf, resourceOf } from '#server/http/endpoints/context.ts'
import { type Handled, handle } from '#server/http/endpoints/registry.ts'
import { createEntryGate } from '#server/http/handlers/entry-gate.ts'
import { found, type HandlerParts } from '#server/http/handlers/parts.ts'
import { qrShape } from '#server/http/pieces/qr.ts'
import { problem } from '#server/http/problems.ts'
import { listCorrections } from '#server/store/queries/corrections.ts'
import { findEntryAccess } from '#server/store/queries/entry-access.ts'
import { entryPicks, entryWalk } from '#server/store/queries/entry-picks.ts'
import { getEntry } from '#server/store/queries/entries.ts'
import * as api from '#shared/schemas/api/entry.ts'

/** Longer than the work for a known address takes, so that the wait tells nobody whether an address is known. */
const LINK_ANSWER_MS = 250

/** An entrant's private page, and what belongs to it in the office. */
export function entryHandlers({ services, entryGuard }: HandlerParts): Handled[] {
  const gate = createEntryGate(services, entryGuard)
  const { db } = services
  const enter = (context: CallContext, params: { readonly token: string }) => gate(context.address, params.token)
  const write = async (context: CallContext, params: { readonly token: string }) => {
    const access = await enter(context, params)
    await entryGuard.beforeWrite(context.address)
    return { access, about: { draw: access.drawId, entrant: access.entrantId } }
  }
  return [
    handle(api.getEntry, async (context, { params }) => found(await getEntry(services, await enter(context, params)))),
    handle(api.getEntryPicks, async (context, { params, query }) =>
      found(await entryPicks(db, await enter(context, params), query.page)),
    ),
    handle(api.getEntryWalk, async (context, { params }) =>
      found(await entryWalk(services, await enter(context, params), params.pick)),
    ),
    handle(api.chooseAnnouncement, async (context, { params, body }) => {
      const { access, about } = await write(context, params)
      await chooseAnnouncement(services, { ...about, choice: body.choice })
      return found(await getEntry(services, access))
    }),
    handle(api.askCorrection, async (context, { params, body }) => {
      const { access, about } = await write(context, params)
      await askCorrection(services, { ...about, words: body.words })
      return found(await getEntry(services, access))
    }),
    handle(api.noteReceiptOpened, async (context, { params }) => {
      const { about } = await write(context, params)
      await noteReceiptOpened(services, about)
      return {}
    }),
    handle(api.openEntry, async (context, { body }) => {
      const read = readSlipCode(body.code)
      // Told without looking anything up: whether a code exists is not to be learnt from it.
      if (!read.ok) throw wrongCode(read.error.message)
      await entryGuard.beforeCode(context.address)
      if (!(await findEntryAccess(services, read.value))) {
        throw wrongCode('No entry opens with this code. Compare it with the slip once more, or ask the promoter.')
      }
      await entryGuard.afterCode(context.address)
      return { code: read.value }
    }),
    handle(api.requestEntryLink, async (context, { body }) => {
      await entryGuard.beforeRequest(context.address, body.email)
      await Promise.all([requestEntryLink(services, body), wait(LINK_ANSWER_MS)])
      return {}
    }),

    handle(api.sendEntryLink, async (context, { params }) => {
      await sendEntryLink(services, personOf(context), { draw: params.draw, entrant: Number(params.entrant) })
      return {}
    }),
    handle(api.printSlips, async (context, { params, body: { who, after } }) => {
      const { slips, more } = await printSlips(services, personOf(context), {
        draw: params.draw,
        who: typeof who === 'string' ? who : { entrant: Number(who.entrant) },
        after: after === null ? null : Number(after),
      })
      const { origin } = services.site
      return { slips: slips.map((slip) => ({ ...slip, qr: qrShape(`${origin}/entry/${slip.code}`) })), more }
    }),
    handle(api.listCorrections, (context, { params, query }) => {
      const rights = permissionsOn(['edit', 'run'], context.actor, resourceOf(context))
      return listCorrections(db, { draw: params.draw, page: query.page, rights })
    }),
    handle(api.answerCorrection, async (context, { params, body }) => {
      const rights = permissionsOn(['run'], context.actor, resourceOf(context))
      await answerCorrection(services, personOf(context), {
        draw: params.draw,
        correction: Number(params.correction),
        asPromoter: rights.run,
        ...body,
      })
      return {}
    }),
  ]
}

const wrongCode = (message: string) =>
  problem(422, message, { code: 'wrong-code', title: 'This code opens nothing', errors: [{ field: 'code', message }] })
