import { asc, desc, eq, sql } from 'drizzle-orm'
import type { listCorrections as endpoint } from '#shared/schemas/api/entry.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Database } from '#server/store/database.ts'
import { offsetOf } from '#server/store/page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import { correctionRequest } from '#server/store/schema/entry.ts'
import { person } from '#server/store/schema/people.ts'
import { presentCorrection } from './entries.ts'

const PAGE_SIZE = 20

/** What entrants of a draw ask to have corrected: what waits first, the oldest before others; then the latest answers. */
export async function listCorrections(
  db: Database,
  input: {
    readonly draw: string
    readonly page: number
    readonly rights: { readonly edit: boolean; readonly run: boolean }
  },
): Promise<ResponseOf<typeof endpoint>> {
  const ofDraw = eq(correctionRequest.drawId, input.draw)
  const waiting = sql`${correctionRequest.state} = 'open'`
  const [rows, [counts]] = await Promise.all([
    db
      .select({
        row: correctionRequest,
        code: entrant.code,
        name: entrantPerson.name,
        by: person.name,
        draw: draw.state,
      })
      .from(correctionRequest)
      .innerJoin(draw, eq(draw.id, correctionRequest.drawId))
      .innerJoin(entrant, eq(entrant.id, correctionRequest.entrantId))
      .innerJoin(entrantPerson, eq(entrantPerson.entrantId, correctionRequest.entrantId))
      .leftJoin(person, eq(person.id, correctionRequest.answeredBy))
      .where(ofDraw)
      .orderBy(
        desc(waiting),
        asc(sql`case when ${waiting} then ${correctionRequest.id} end`),
        desc(correctionRequest.answeredAt),
        desc(correctionRequest.id),
      )
      .limit(PAGE_SIZE)
      .offset(offsetOf(input.page, PAGE_SIZE)),
    db
      .select({ total: sql<number>`count(*)::int`, open: sql<number>`(count(*) filter (where ${waiting}))::int` })
      .from(correctionRequest)
      .where(ofDraw),
  ])
  return {
    items: rows.map(({ row, code, name, by, draw: state }) => ({
      ...presentCorrection(row),
      entrant: { id: String(row.entrantId), code, name },
      answeredBy: by,
      mayAnswer: row.state === 'open' && (row.afterSeal || state === 'sealed' ? input.rights.run : input.rights.edit),
    })),
    total: counts?.total ?? 0,
    open: counts?.open ?? 0,
    page: input.page,
    pageSize: PAGE_SIZE,
  }
}
