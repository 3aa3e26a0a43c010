import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { refused } from '#server/commands/command-error.ts'
import { lockDraw } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrantImport, importRow } from '#server/store/schema/entrant.ts'
import { lockImport } from './apply-import.ts'

/** Throws an import away that was not brought in. */
export async function discardImport(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly import: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    const found = await lockImport(tx, input)
    if (found.state === 'discarded') return
    if (found.state === 'applied') {
      throw refused('This import is in the list already. Take entrants out of the list one by one instead.')
    }
    if (found.state === 'reading') throw refused('The file is still being read. Wait until that is done.')
    await tx.db.delete(importRow).where(eq(importRow.importId, found.id))
    await tx.db
      .update(entrantImport)
      .set({ state: 'discarded', errors: [], touchedAt: services.clock.now() })
      .where(eq(entrantImport.id, found.id))
    await audit(tx, services, actor, {
      action: 'import.discard',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: found.id,
      sentence: `Threw away the import of ${found.fileName}.`,
    })
  })
}
