import { and, asc, desc, eq, type SQL, sql } from 'drizzle-orm'
import type { EntrantRow, listEntrants as endpoint } from '#shared/schemas/api/office.ts'
import type { QueryOf, ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Database } from '#server/store/database.ts'
import { containing, offsetOf } from '#server/store/page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import { instantOf } from '#server/time/instants.ts'

const PAGE_SIZE = 50

const fields = { entrant, person: entrantPerson }
const joined = and(eq(entrantPerson.drawId, entrant.drawId), eq(entrantPerson.entrantId, entrant.id))

type Joined = { entrant: typeof entrant.$inferSelect; person: typeof entrantPerson.$inferSelect | null }

const SOURCES: Readonly<Record<string, string>> = { import: 'import', 'by-hand': 'added by hand' }

/** A person who was erased leaves their code and tickets behind. */
export function presentEntrant({ entrant: row, person }: Joined): EntrantRow {
  return {
    id: String(row.id),
    code: row.code,
    name: person?.name ?? '(erased)',
    label: person?.label ?? '(erased)',
    tickets: row.tickets,
    email: person?.email ?? null,
    phone: person?.phone ?? null,
    numbers: person?.numbers ?? null,
    source: SOURCES[row.source] ?? row.source,
    addedAt: instantOf(row.addedAt),
    announced: person?.announced ?? 'label',
    version: row.version,
  }
}

/** The text that a search looks through; the same words as in the index entrant_person_words. */
const WORDS = sql`lower(${entrantPerson.name} || ' ' || ${entrantPerson.label} || ' ' || coalesce(${entrantPerson.email}, '') || ' ' || coalesce(${entrantPerson.phone}, '') || ' ' || coalesce(${entrantPerson.numbers}, ''))`

/** The entrants whose words hold what is looked for, or whose code it is: each by its own index. */
const found = (drawId: string, q: string): SQL =>
  sql`select ${entrantPerson.entrantId} from ${entrantPerson} where ${entrantPerson.drawId} = ${drawId} and ${WORDS} like ${containing(q)}
    union select e.id from entrant e where e.draw_id = ${drawId} and e.code = ${q.toUpperCase()}`

/** Entrants of a draw, searched, sorted and paged by index. `tickets` counts those of all rows found. */
export async function listEntrants(
  db: Database,
  input: { readonly draw: string } & QueryOf<typeof endpoint>,
): Promise<ResponseOf<typeof endpoint>> {
  const q = input.q.trim()
  const where = and(
    eq(entrant.drawId, input.draw),
    q === '' ? undefined : sql`${entrant.id} in (${found(input.draw, q)})`,
  )
  const direction = input.direction === 'up' ? asc : desc
  const order: Record<typeof input.sort, SQL[]> = {
    added: [direction(entrant.id)],
    name: [direction(sql`lower(${entrantPerson.name})`), direction(entrantPerson.entrantId)],
    label: [direction(sql`lower(${entrantPerson.label})`), direction(entrantPerson.entrantId)],
    tickets: [direction(entrant.tickets), direction(entrant.id)],
    code: [direction(entrant.code)],
  }
  const byPerson = input.sort === 'name' || input.sort === 'label'
  const base = db.select(fields).from(entrant)
  // Names are ordered by the index of those who have one; a person who was erased has none to be found by.
  const rowsOf = byPerson
    ? base.innerJoin(entrantPerson, and(joined, eq(entrantPerson.drawId, input.draw)))
    : base.leftJoin(entrantPerson, joined)
  const [rows, totals] = await Promise.all([
    rowsOf
      .where(where)
      .orderBy(...order[input.sort])
      .limit(PAGE_SIZE)
      .offset(offsetOf(input.page, PAGE_SIZE)),
    q === '' ? countedTotals(db, input.draw) : foundTotals(db, where),
  ])
  return { items: rows.map(presentEntrant), ...totals, page: input.page, pageSize: PAGE_SIZE }
}

/** One entrant of this draw; null where there is none. */
export async function findEntrant(
  db: Database,
  input: { readonly draw: string; readonly entrant: number },
): Promise<EntrantRow | null> {
  const [row] = await db
    .select(fields)
    .from(entrant)
    .leftJoin(entrantPerson, joined)
    .where(and(eq(entrant.drawId, input.draw), eq(entrant.id, input.entrant)))
  return row ? presentEntrant(row) : null
}

async function countedTotals(db: Database, drawId: string) {
  const [row] = await db
    .select({ total: draw.entrantCount, tickets: draw.ticketCount })
    .from(draw)
    .where(eq(draw.id, drawId))
  return row ?? { total: 0, tickets: 0 }
}

async function foundTotals(db: Database, where: SQL | undefined) {
  const [row] = await db
    .select({
      total: sql<number>`count(*)::int`,
      tickets: sql<number>`coalesce(sum(${entrant.tickets}), 0)`.mapWith(Number),
    })
    .from(entrant)
    .where(where)
  return row ?? { total: 0, tickets: 0 }
}
