import { and, eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError, notFound, refused } from '#server/commands/command-error.ts'
import { lockDraw } from '#server/commands/draws/lock-draw.ts'
import { lockEntrant } from '#server/commands/entrants/find-entrant.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { correctionRequest } from '#server/store/schema/entry.ts'
import { queueEntryMail } from './entry-mail.ts'

export interface AnswerCorrectionInput {
  readonly draw: string
  readonly correction: number
  readonly verdict: 'done' | 'refused'
  readonly words: string
  /** Whether whoever answers is a promoter: only they answer what was asked after the seal. */
  readonly asPromoter: boolean
}

/** Answers a request once; the words go to the entrant by mail, where they have an address, and onto their page. */
export async function answerCorrection(
  services: Services,
  actor: CommandActor,
  input: AnswerCorrectionInput,
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    const [asked] = await tx.db
      .select()
      .from(correctionRequest)
      .where(and(eq(correctionRequest.id, input.correction), eq(correctionRequest.drawId, its.id)))
      .for('update')
    if (!asked) throw notFound('request')
    if (asked.state !== 'open') {
      throw new CommandError(
        'changed',
        'Somebody answered this request already. Load the page again to see the answer.',
      )
    }
    if ((asked.afterSeal || its.state === 'sealed') && !input.asPromoter) {
      throw refused('The list is sealed: only a promoter can answer this, by a new seal or by refusing with a reason.')
    }
    const { row, person } = await lockEntrant(tx, { draw: its.id, entrant: asked.entrantId })
    await tx.db
      .update(correctionRequest)
      .set({
        state: input.verdict,
        answer: input.words,
        answeredAt: services.clock.now(),
        answeredBy: actor?.id ?? null,
      })
      .where(eq(correctionRequest.id, asked.id))
    const told = { drawId: its.id, entrantId: row.id, kind: 'correction', mark: String(asked.id) } as const
    if (person.email !== null) await queueEntryMail(tx, services, { ...told, correctionId: asked.id })
    await audit(tx, services, actor, {
      action: 'correction.answer',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(asked.id),
      sentence: `${input.verdict === 'done' ? 'Made' : 'Refused'} the correction that ${person.name} (${row.code}) asked for: ${input.words}`,
    })
  })
}
