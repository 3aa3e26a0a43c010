import { eq, sql } from 'drizzle-orm'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import type { Database } from '#server/store/database.ts'
import { mail } from '#server/store/schema/operation.ts'

/** The mails of a draw by what they are about. */
export async function mailCountsOf(db: Database, drawId: string): Promise<OfficeDraw['mail']> {
  const rows = await db
    .select({ kind: mail.kind, state: mail.state, count: sql<number>`count(*)::int` })
    .from(mail)
    .where(eq(mail.drawId, drawId))
    .groupBy(mail.kind, mail.state)
  const count = (kinds: readonly string[], state: string) =>
    rows.reduce((sum, row) => sum + (kinds.includes(row.kind) && row.state === state ? row.count : 0), 0)
  const counts = (...kinds: string[]) => ({
    queued: count(kinds, 'queued'),
    sent: count(kinds, 'sent'),
    failed: count(kinds, 'failed'),
  })
  return {
    entry: counts('entry', 'entry-link', 'correction'),
    seal: counts('seal'),
    result: counts('result', 'won'),
    notice: counts('postponed', 'cancelled', 'failed'),
  }
}
