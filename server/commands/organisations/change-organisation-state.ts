import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid, refused } from '#server/commands/command-error.ts'
import { readReason } from '#server/commands/draws/draw-values.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { organisation } from '#server/store/schema/people.ts'
import { lockOrganisation } from './lock-organisation.ts'

/**
 * Approves an organisation that waits, suspends one, or restores it; the last two with a public reason, in the log. What a
 * suspended organisation has sealed is still drawn.
 */
export async function changeOrganisationState(
  services: Services,
  actor: CommandActor,
  input: {
    readonly organisation: string
    readonly version: number
    readonly state: 'approved' | 'suspended'
    readonly reason: string | null
  },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const row = await lockOrganisation(tx, input)
    if (row.state === input.state) throw refused(`This organisation is ${row.state} already.`)
    const approval = row.state === 'pending' && input.state === 'approved'
    if (!approval && input.reason === null) throw invalid('reason', 'Say why in a sentence: the public reads it.')
    const reason = input.reason === null ? null : readReason(input.reason)
    await tx.db
      .update(organisation)
      .set({ state: input.state, version: row.version + 1 })
      .where(eq(organisation.id, row.id))
    const did = approval ? 'Approved' : input.state === 'suspended' ? 'Suspended' : 'Restored'
    await audit(tx, services, actor, {
      action: `organisation.${approval ? 'approve' : input.state === 'suspended' ? 'suspend' : 'restore'}`,
      organisationId: row.id,
      sentence: `${did} ${row.name}${reason === null ? '.' : `: ${reason}`}`,
      before: { state: row.state },
      after: { state: input.state },
    })
    if (approval) return
    await appendLog(tx, services, {
      event: input.state === 'suspended' ? 'suspended' : 'restored',
      organisation: { id: row.id, slug: row.slug },
      draw: null,
      ...(reason === null ? {} : { note: reason }),
    })
  })
}
