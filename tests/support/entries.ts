import { and, desc, eq } from 'drizzle-orm'
import { simpleParser } from 'mailparser'
import { goOn } from '#server/jobs/crash-points.ts'
import { prepareMail } from '#server/jobs/mail/prepare-mail.ts'
import { sendMail } from '#server/jobs/mail/send-mail.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import type { TestSite } from './site.ts'

/** The entrant of a draw with this name. */
export async function entrantNamed(site: TestSite, draw: string, name: string) {
  const [row] = await site.services.db
    .select({ id: entrant.id, code: entrant.code, version: entrant.version, person: entrantPerson })
    .from(entrant)
    .innerJoin(entrantPerson, eq(entrantPerson.entrantId, entrant.id))
    .where(and(eq(entrant.drawId, draw), eq(entrantPerson.name, name)))
    .orderBy(desc(entrant.id))
  if (!row) throw new Error(`Nobody is called ${name}.`)
  return row
}

/** Sends what waits, after writing the rows of one kind of mail. */
export async function sendMails(site: TestSite, draw: string, about?: 'entry' | 'seal' | 'result'): Promise<void> {
  if (about) await prepareMail(site.services, goOn, { draw, about })
  await sendMail(site.services, goOn)
}

/** The mails that reached an address, newest first, with the token of their private link. */
export async function entryMails(site: TestSite, to: string) {
  const mails = []
  for (const stored of site.mail.store.list(to)) {
    const { subject, text = '', messageId } = await simpleParser(site.mail.store.raw(stored))
    mails.push({ subject, text, messageId, token: /\/entry\/([\w-]{43})\b/.exec(text)?.[1] ?? null })
  }
  return mails
}
