import type { Services } from '#server/services.ts'
import { auditDetail, auditEvent } from '#server/store/schema/record.ts'
import type { CommandActor } from './actor.ts'
import type { Transaction } from './transaction.ts'

export interface Audited {
  /** `draw.open`, `entrant.add`, … */
  readonly action: string
  readonly organisationId: string | null
  readonly drawId?: string
  readonly subjectId?: string
  /** What happened, for the audit page: "Opened the draw for entries." May name people: it can be erased. */
  readonly sentence: string
  readonly before?: unknown
  readonly after?: unknown
}

/** Writes an audit event; its words go into the side table that can be erased. */
export async function audit(
  tx: Transaction,
  services: Pick<Services, 'clock'>,
  actor: CommandActor,
  event: Audited,
): Promise<void> {
  const [row] = await tx.db
    .insert(auditEvent)
    .values({
      at: services.clock.now(),
      action: event.action,
      actorId: actor?.id ?? null,
      organisationId: event.organisationId,
      drawId: event.drawId ?? null,
      subjectId: event.subjectId ?? null,
    })
    .returning({ id: auditEvent.id })
  if (!row) throw new Error('The audit event was not written.')
  await tx.db.insert(auditDetail).values({
    eventId: row.id,
    actorName: actor?.name ?? null,
    sentence: event.sentence,
    before: event.before ?? null,
    after: event.after ?? null,
  })
}
