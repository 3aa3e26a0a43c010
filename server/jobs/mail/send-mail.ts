import { and, asc, eq, lte, sql } from 'drizzle-orm'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { reasonOf } from '#server/adapters/health.ts'
import type { OutgoingMail } from '#server/adapters/mail/mailer.ts'
import { type AccountMail, mailContext } from '#server/commands/account-mail.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { AfterWrite } from '#server/jobs/crash-points.ts'
import type { Services } from '#server/services.ts'
import { mail, mailContent } from '#server/store/schema/operation.ts'
import { accountWords, noticeWords, resultWords, sealWords, wonWords } from './compose.ts'
import { correctionWords, entryWords } from './entry-words.ts'
import { MailFacts } from './mail-facts.ts'
import { privateLink } from './private-link.ts'

const MOST_ATTEMPTS = 12
/** Seconds until the next attempt: 30, 60, 120, … at most an hour. */
const waitAfter = (attempts: number): number => Math.min(3600, 15 * 2 ** attempts)

type MailRow = typeof mail.$inferSelect
type Outgoing = Omit<OutgoingMail, 'messageId'>

/**
 * Sends every mail that is due. Each row is locked while its mail is handed over and marked in the same transaction, so no
 * two workers send it. A worker that dies after the mail server accepted a mail and before the mark is committed leaves
 * the row unmarked: the mail then goes out again with the same Message-ID, by which mail programs show it once. Nothing
 * stronger is possible over SMTP. Tells when the next attempt of a mail that was put off is due.
 */
export async function sendMail(services: Services, afterWrite: AfterWrite): Promise<{ readonly nextAt: Date | null }> {
  const facts = new MailFacts(services, services.db)
  // One at a time in each worker: a worker that dies leaves at most one mail in doubt. More workers send faster.
  while (await sendNext(services, afterWrite, facts));
  const [next] = await services.db
    .select({ at: sql<Date | null>`min(${mail.nextAttemptAt})`.mapWith(mail.nextAttemptAt) })
    .from(mail)
    .where(eq(mail.state, 'queued'))
  return { nextAt: next?.at ?? null }
}

/** Sends one mail that is due; false where there is none that nobody else has in hand. */
async function sendNext(services: Services, afterWrite: AfterWrite, facts: MailFacts): Promise<boolean> {
  const sent = await inTransaction(services, async (tx) => {
    const [row] = await tx.db
      .select()
      .from(mail)
      .where(and(eq(mail.state, 'queued'), lte(mail.nextAttemptAt, services.clock.now())))
      .orderBy(asc(mail.nextAttemptAt), asc(mail.id))
      .limit(1)
      // Leaves the key alone, so that a private link can be stored beside the mail meanwhile.
      .for('no key update', { skipLocked: true })
    if (!row) return false
    afterWrite('mail-claimed')
    await handOver(tx, services, afterWrite, facts, row)
    return true
  })
  if (sent) afterWrite('mail-marked')
  return sent
}

async function handOver(
  tx: Transaction,
  services: Services,
  afterWrite: AfterWrite,
  facts: MailFacts,
  row: MailRow,
): Promise<void> {
  const mark = (values: Partial<MailRow>) => tx.db.update(mail).set(values).where(eq(mail.id, row.id))
  let outgoing: Outgoing | null
  try {
    outgoing = await compose(tx, services, facts, row)
  } catch (error) {
    // One mail that cannot be written must not hold up the others.
    await putOff(mark, services, row, reasonOf(error))
    return
  }
  if (outgoing === null) {
    await mark({ state: 'dropped', error: 'There is no address any more.' })
    await tx.db.delete(mailContent).where(eq(mailContent.mailId, row.id))
    return
  }
  const outcome = await services.mailer.send({ messageId: row.messageId, ...outgoing })
  if (outcome.kind === 'accepted') afterWrite('mail-accepted')
  const now = services.clock.now()
  const attempts = row.attempts + 1
  if (outcome.kind === 'accepted') {
    await mark({ state: 'sent', sentAt: now, attempts, error: null })
    await tx.db.delete(mailContent).where(eq(mailContent.mailId, row.id))
    return
  }
  const error = `${outcome.code} ${outcome.detail}`
  if (outcome.kind === 'permanent') {
    await mark({ state: 'failed', attempts, error, nextAttemptAt: now })
    await tx.db.delete(mailContent).where(eq(mailContent.mailId, row.id))
  } else await putOff(mark, services, row, error)
}

/** Notes an attempt that failed: the mail is tried again later, or given up. */
async function putOff(
  mark: (values: Partial<MailRow>) => PromiseLike<unknown>,
  services: Services,
  row: MailRow,
  error: string,
): Promise<void> {
  const attempts = row.attempts + 1
  const nextAttemptAt = new Date(services.clock.now().getTime() + waitAfter(attempts) * 1000)
  await mark({ attempts, error, nextAttemptAt, ...(attempts >= MOST_ATTEMPTS ? { state: 'failed' as const } : {}) })
}

/** The mail's words; null where its person was erased. */
async function compose(tx: Transaction, services: Services, facts: MailFacts, row: MailRow): Promise<Outgoing | null> {
  switch (row.kind) {
    case 'invitation':
    case 'password-reset':
      return accountMail(tx, services, row)
    case 'postponed':
    case 'cancelled':
    case 'failed': {
      const { kind, drawId, entrantId, logIndex } = row
      if (drawId === null || entrantId === null || logIndex === null) throw new Error('A notice tells of no draw.')
      const notice = await facts.notice(entrantId, logIndex)
      if (!notice?.email) return null
      return { to: notice.email, ...noticeWords(await facts.draw(drawId), { kind, ...notice }) }
    }
    case 'entry':
    case 'entry-link':
    case 'correction':
      return entryMail(services, facts, row)
    case 'seal':
    case 'result':
    case 'won':
      return entrantMail(services, facts, row)
  }
}

async function entryMail(services: Services, facts: MailFacts, row: MailRow): Promise<Outgoing | null> {
  const { drawId, entrantId, correctionId } = row
  if (drawId === null || entrantId === null) throw new Error('A mail to an entrant tells of no entry.')
  const entry = await facts.entry(entrantId)
  if (!entry?.email) return null
  const draw = await facts.draw(drawId)
  const asked = correctionId === null ? null : await facts.correction(correctionId)
  const link = await privateLink(services, row)
  if (link === null) return null
  if (row.kind === 'correction') {
    return asked ? { to: entry.email, ...correctionWords(draw, { ...entry, ...asked, link }) } : null
  }
  return { to: entry.email, ...entryWords(draw, { ...entry, link, again: row.kind === 'entry-link' }) }
}

async function entrantMail(services: Services, facts: MailFacts, row: MailRow): Promise<Outgoing | null> {
  const { drawId, sealId, leaf, kind } = row
  if (drawId === null || sealId === null || leaf === null) throw new Error('A mail to an entrant tells of no leaf.')
  const found = await facts.leaf(sealId, leaf)
  if (!found?.person.email) return null
  const { person, tickets, code } = found
  const to = person.email as string
  const draw = await facts.draw(drawId)
  const link = await privateLink(services, row)
  if (kind === 'won') {
    const prizes = await facts.prizes(drawId, sealId, leaf)
    return { to, ...wonWords(draw, { name: person.name, code, prizes, link }) }
  }
  if (kind === 'result') return { to, ...resultWords(draw, { name: person.name, tickets, link }) }
  const seal = await facts.sealRow(sealId)
  return {
    to,
    ...sealWords(draw, {
      name: person.name,
      tickets,
      totalTickets: seal.tickets,
      entrants: seal.entrants,
      label: person.label,
      code,
      sealDigest: seal.digest,
      replaces: seal.supersedes,
      reason: seal.reason,
      link,
    }),
    attachments: [
      { name: 'receipt.json', contentType: 'application/json', content: await facts.receipt(sealId, person, tickets) },
    ],
  }
}

async function accountMail(tx: Transaction, services: Services, row: MailRow): Promise<Outgoing | null> {
  const [content] = await tx.db.select().from(mailContent).where(eq(mailContent.mailId, row.id))
  if (!content) return null
  const text = decodeUtf8(services.secrets.open(content.payload, mailContext(row.key)))
  const told = JSON.parse(text ?? '') as AccountMail
  return { to: told.to, ...accountWords(told) }
}
