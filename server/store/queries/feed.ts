import { and, desc, eq, inArray, isNotNull, ne } from 'drizzle-orm'
import type { Database } from '#server/store/database.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { instantOf } from '#server/time/instants.ts'

const EVENTS = ['opened', 'sealed', 'replaced', 'postponed', 'cancelled', 'drawn', 'failed', 'promoted', 'forfeited']
const ENTRIES = 50

export interface FeedEntry {
  readonly index: number
  readonly at: string
  readonly event: string
  readonly note: string | null
  readonly draw: { readonly slug: string; readonly title: string }
}

export interface FeedFacts {
  readonly slug: string
  readonly name: string
  readonly createdAt: string
  readonly entries: readonly FeedEntry[]
}

/** What lately happened to an organisation's draws, newest first; null where there is none, or it was never approved. */
export async function feedOf(db: Database, slug: string): Promise<FeedFacts | null> {
  const [owner] = await db
    .select()
    .from(organisation)
    .where(and(eq(organisation.slug, slug), ne(organisation.state, 'pending')))
  if (!owner) return null
  const rows = await db
    .select({
      index: logEvent.index,
      at: logEvent.at,
      event: logEvent.event,
      note: logNote.text,
      draw: { slug: draw.slug, title: draw.title },
    })
    .from(logEvent)
    .innerJoin(draw, eq(draw.id, logEvent.drawId))
    .leftJoin(logNote, eq(logNote.logIndex, logEvent.index))
    .where(and(eq(draw.organisationId, owner.id), isNotNull(draw.openedAt), inArray(logEvent.event, EVENTS)))
    .orderBy(desc(logEvent.index))
    .limit(ENTRIES)
  const entries = rows.map((row) => ({ ...row, at: instantOf(row.at) }))
  return { slug: owner.slug, name: owner.name, createdAt: instantOf(owner.createdAt), entries }
}
