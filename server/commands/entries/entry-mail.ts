import { messageIdFor } from '#server/adapters/mail/mailer.ts'
import { mailDomain } from '#server/commands/account-mail.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { mail } from '#server/store/schema/operation.ts'

export interface EntryMail {
  readonly drawId: string
  readonly entrantId: number
  /** Left out, the mail that everybody gets once when they are brought in. */
  readonly kind?: 'entry' | 'entry-link' | 'correction'
  /** What tells this mail from others of its kind; the same one is queued once. */
  readonly mark?: string
  readonly correctionId?: number
}

/** Queues a mail to one entrant with their private link. Who has no address is found out when it is sent. */
export async function queueEntryMail(tx: Transaction, services: Services, told: EntryMail): Promise<void> {
  const { drawId, entrantId, kind = 'entry', mark, correctionId } = told
  const key = [kind, entrantId, ...(mark === undefined ? [] : [mark])].join(':')
  const now = services.clock.now()
  await tx.db
    .insert(mail)
    .values({
      key,
      kind,
      drawId,
      entrantId,
      correctionId: correctionId ?? null,
      messageId: messageIdFor([key], mailDomain(services)),
      createdAt: now,
      nextAttemptAt: now,
    })
    .onConflictDoNothing()
  await services.queue.enqueue(tx.client, 'send-mail', { draw: drawId })
}
