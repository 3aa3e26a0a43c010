import { and, eq, sql } from 'drizzle-orm'
import type { DrawState } from '#shared/schemas/values.ts'
import { audit } from '#server/commands/audit.ts'
import { refused } from '#server/commands/command-error.ts'
import { lockDraw } from '#server/commands/draws/lock-draw.ts'
import { lockEntrant } from '#server/commands/entrants/find-entrant.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { correctionRequest } from '#server/store/schema/entry.ts'

/** An entrant's requests that wait for an answer at one time, at most. */
const MOST_OPEN = 5

/** Why nothing can be corrected in a draw any more; null while something can. */
export function correctionRefusal(row: { readonly state: DrawState; readonly drawAt: Date }, now: Date): string | null {
  switch (row.state) {
    case 'draft':
      return 'This draw is not open yet.'
    case 'drawn':
    case 'concluded':
      return 'The draw is drawn: nothing in its list can change any more. Write to the promoter.'
    case 'cancelled':
    case 'failed':
      return 'This draw has ended without a result. Write to the promoter.'
    default:
      return now >= row.drawAt
        ? 'The draw time has come: from then on nothing in the list can change. Write to the promoter.'
        : null
  }
}

/** Takes down what an entrant wants corrected. Before the seal the office answers, after it the promoter. */
export async function askCorrection(
  services: Services,
  input: { readonly draw: string; readonly entrant: number; readonly words: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    const now = services.clock.now()
    const refusal = correctionRefusal(its, now)
    if (refusal !== null) throw refused(refusal)
    const { row, person } = await lockEntrant(tx, input)
    const [waiting] = await tx.db
      .select({ count: sql<number>`count(*)::int` })
      .from(correctionRequest)
      .where(and(eq(correctionRequest.entrantId, row.id), eq(correctionRequest.state, 'open')))
    if ((waiting?.count ?? 0) >= MOST_OPEN) {
      throw refused(`${MOST_OPEN} of your requests still wait for an answer. Write to the promoter if it is urgent.`)
    }
    const [made] = await tx.db
      .insert(correctionRequest)
      .values({
        drawId: its.id,
        entrantId: row.id,
        words: input.words,
        afterSeal: its.state === 'sealed',
        askedAt: now,
      })
      .returning({ id: correctionRequest.id })
    await audit(tx, services, null, {
      action: 'correction.ask',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: String(made?.id),
      sentence: `${person.name} (${row.code}) asked for a correction: ${input.words}`,
    })
  })
}
