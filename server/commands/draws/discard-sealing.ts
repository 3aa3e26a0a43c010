import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { type SealingRow, waitingSealing } from '#server/store/queries/sealings.ts'
import { sealedLeaf, sealedLeafPerson, sealing, sealSecret } from '#server/store/schema/seal.ts'

/**
 * Discards the seal of a draw that waits for its timestamp, where one does, with its leaves and secrets: it never counted,
 * and nobody outside saw it. The draw must be locked. `why` completes "Discarded a seal that had no timestamp yet: …".
 */
export async function discardWaitingSeal(
  tx: Transaction,
  services: Services,
  actor: CommandActor,
  draw: { readonly id: string; readonly organisationId: string },
  why: string,
): Promise<SealingRow | null> {
  const waiting = await waitingSealing(tx.db, draw.id)
  if (!waiting) return null
  await tx.db.delete(sealedLeafPerson).where(eq(sealedLeafPerson.sealId, waiting.id))
  await tx.db.delete(sealedLeaf).where(eq(sealedLeaf.sealId, waiting.id))
  await tx.db.delete(sealSecret).where(eq(sealSecret.sealId, waiting.id))
  await tx.db.delete(sealing).where(eq(sealing.id, waiting.id))
  await audit(tx, services, actor, {
    action: 'draw.discard-seal',
    organisationId: draw.organisationId,
    drawId: draw.id,
    subjectId: waiting.digest,
    sentence: `Discarded a seal that had no timestamp yet: ${why}`,
    before: { digest: waiting.digest, drawAt: waiting.drawAt },
  })
  return waiting
}
