import { asc, desc, eq, sql } from 'drizzle-orm'
import type { DrawPage, LogPage } from '#shared/schemas/api/public.ts'
import type { Database } from '#server/store/database.ts'
import { offsetOf } from '#server/store/page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { instantOf } from '#server/time/instants.ts'

const PAGE_SIZE = 50

/** The site's log, newest first. */
export async function getLog(db: Database, input: { readonly page: number }): Promise<LogPage> {
  const [rows, counted] = await Promise.all([
    db
      .select({
        index: logEvent.index,
        at: logEvent.at,
        event: logEvent.event,
        draw: { slug: draw.slug, title: draw.title },
        organisation: { slug: organisation.slug, name: organisation.name },
        note: logNote.text,
        digest: logEvent.digest,
      })
      .from(logEvent)
      .leftJoin(logNote, eq(logNote.logIndex, logEvent.index))
      .leftJoin(draw, eq(draw.id, logEvent.drawId))
      .leftJoin(organisation, eq(organisation.id, logEvent.organisationId))
      .orderBy(desc(logEvent.index))
      .limit(PAGE_SIZE)
      .offset(offsetOf(input.page, PAGE_SIZE)),
    db.select({ total: sql<number>`count(*)::int` }).from(logEvent),
  ])
  return {
    items: rows.map((row) => ({ ...row, at: instantOf(row.at) })),
    total: counted[0]?.total ?? 0,
    page: input.page,
    pageSize: PAGE_SIZE,
  }
}

/** What the log says of one draw, oldest first. */
export async function historyOf(db: Database, drawId: string): Promise<DrawPage['history']> {
  const rows = await db
    .select({
      index: logEvent.index,
      at: logEvent.at,
      event: logEvent.event,
      note: logNote.text,
      digest: logEvent.digest,
    })
    .from(logEvent)
    .leftJoin(logNote, eq(logNote.logIndex, logEvent.index))
    .where(eq(logEvent.drawId, drawId))
    .orderBy(asc(logEvent.index))
  return rows.map((row) => ({ ...row, at: instantOf(row.at) }))
}
