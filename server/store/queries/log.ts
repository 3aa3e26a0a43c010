import { asc, between, desc, eq } from 'drizzle-orm'
import type { DrawPage, LogPage } from '#shared/schemas/api/public.ts'
import type { Database } from '#server/store/database.ts'
import { offsetOf } from '#server/store/page.ts'
import { logSize } from '#server/store/queries/log-tree.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { instantOf } from '#server/time/instants.ts'

const PAGE_SIZE = 50

/** The site's log, newest first: a page of it, or the page on which entry `at` stands. */
export async function getLog(
  db: Database,
  input: { readonly page: number; readonly at?: number | undefined },
): Promise<LogPage> {
  const total = await logSize(db)
  const page = input.at === undefined || input.at >= total ? input.page : Math.ceil((total - input.at) / PAGE_SIZE)
  const newest = total - 1 - offsetOf(page, PAGE_SIZE)
  const rows = await db
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
    // Numbers have no gap: a page is a range of them, wherever it is.
    .where(between(logEvent.index, newest - PAGE_SIZE + 1, newest))
    .orderBy(desc(logEvent.index))
  return {
    items: rows.map((row) => ({ ...row, at: instantOf(row.at) })),
    total,
    page,
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
