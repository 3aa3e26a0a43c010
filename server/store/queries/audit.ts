import { and, desc, eq, sql } from 'drizzle-orm'
import type { auditEntry } from '#shared/schemas/api/office.ts'
import type { z } from 'zod'
import type { Database } from '#server/store/database.ts'
import { containing, offsetOf, type Page } from '#server/store/page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { auditDetail, auditEvent } from '#server/store/schema/record.ts'
import { instantOf } from '#server/time/instants.ts'

const PAGE_SIZE = 50
export type AuditEntry = z.infer<typeof auditEntry>

/** The audit trail, newest first: of one draw, of one organisation, or of the whole site. */
export async function getAudit(
  db: Database,
  input: { readonly q: string; readonly page: number; readonly draw?: string; readonly organisation?: string },
): Promise<Page<AuditEntry>> {
  const q = input.q.trim()
  const where = and(
    input.draw ? eq(auditEvent.drawId, input.draw) : undefined,
    input.organisation ? eq(organisation.slug, input.organisation) : undefined,
    q === ''
      ? undefined
      : sql`lower(${auditDetail.sentence} || ' ' || coalesce(${auditDetail.actorName}, '')) like ${containing(q)}`,
  )
  const [rows, counted] = await Promise.all([
    db
      .select({
        event: auditEvent,
        detail: auditDetail,
        draw: { id: draw.id, title: draw.title },
        organisation: organisation.name,
      })
      .from(auditEvent)
      .leftJoin(auditDetail, eq(auditDetail.eventId, auditEvent.id))
      .leftJoin(draw, eq(draw.id, auditEvent.drawId))
      .leftJoin(organisation, eq(organisation.id, auditEvent.organisationId))
      .where(where)
      .orderBy(desc(auditEvent.id))
      .limit(PAGE_SIZE)
      .offset(offsetOf(input.page, PAGE_SIZE)),
    db
      .select({ total: sql<number>`count(*)::int` })
      .from(auditEvent)
      .leftJoin(auditDetail, eq(auditDetail.eventId, auditEvent.id))
      .leftJoin(organisation, eq(organisation.id, auditEvent.organisationId))
      .where(where),
  ])
  return {
    items: rows.map(({ event, detail, draw: about, organisation: owner }) => ({
      id: String(event.id),
      at: instantOf(event.at),
      actor: detail?.actorName ?? null,
      action: event.action,
      draw: about,
      organisation: owner,
      sentence: detail?.sentence ?? '(The words of this event were erased.)',
      before: detail?.before ?? null,
      after: detail?.after ?? null,
    })),
    total: counted[0]?.total ?? 0,
    page: input.page,
    pageSize: PAGE_SIZE,
  }
}
