import { and, eq } from 'drizzle-orm'
import type { Services } from '#server/services.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { receiptOpening } from '#server/store/schema/entry.ts'
import { sealedLeafPerson } from '#server/store/schema/seal.ts'

/** Counts an entrant's receipt of the seal in force as opened, once, if the draw time is still to come. */
export async function noteReceiptOpened(
  { db, clock }: Pick<Services, 'db' | 'clock'>,
  input: { readonly draw: string; readonly entrant: number },
): Promise<void> {
  const [row] = await db.select({ state: draw.state }).from(draw).where(eq(draw.id, input.draw))
  const seal = sealInForce(await sealsOf(db, input.draw))
  const now = clock.now()
  if (row?.state !== 'sealed' || !seal || now >= seal.drawAt) return
  const [own] = await db
    .select({ leaf: sealedLeafPerson.leaf })
    .from(sealedLeafPerson)
    .where(and(eq(sealedLeafPerson.sealId, seal.id), eq(sealedLeafPerson.entrantId, input.entrant)))
  if (!own) return
  await db.insert(receiptOpening).values({ sealId: seal.id, leaf: own.leaf, at: now }).onConflictDoNothing()
}
