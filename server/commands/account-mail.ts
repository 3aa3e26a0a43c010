import { utf8 } from '#shared/bytes/bytes.ts'
import type { Role } from '#shared/schemas/values.ts'
import { messageIdFor } from '#server/adapters/mail/mailer.ts'
import type { Services } from '#server/services.ts'
import { mail, mailContent } from '#server/store/schema/operation.ts'
import type { Transaction } from './transaction.ts'

/** What a mail to an account tells. It waits encrypted, and is deleted when it is sent: it holds a secret link. */
export type AccountMail =
  | {
      readonly kind: 'invitation'
      readonly to: string
      readonly link: string
      readonly organisation: string
      readonly role: Role
      readonly invitedBy: string
      readonly expiresAt: string
    }
  | {
      readonly kind: 'password-reset'
      readonly to: string
      readonly link: string
      readonly name: string
      readonly expiresAt: string
    }

export const mailContext = (key: string): string => `mail:${key}`

/** The host name in Message-IDs. */
export const mailDomain = (services: Pick<Services, 'site'>): string => new URL(services.site.origin).hostname

/** Queues a mail to an account, once for each key. */
export async function queueAccountMail(
  tx: Transaction,
  services: Services,
  key: string,
  content: AccountMail,
): Promise<void> {
  const now = services.clock.now()
  const [row] = await tx.db
    .insert(mail)
    .values({
      key,
      kind: content.kind,
      messageId: messageIdFor([key], mailDomain(services)),
      createdAt: now,
      nextAttemptAt: now,
    })
    .onConflictDoNothing()
    .returning({ id: mail.id })
  if (!row) return
  const payload = services.secrets.seal(utf8(JSON.stringify(content)), mailContext(key))
  await tx.db.insert(mailContent).values({ mailId: row.id, payload })
  await services.queue.enqueue(tx.client, 'send-mail', {})
}
