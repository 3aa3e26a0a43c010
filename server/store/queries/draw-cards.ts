import { and, asc, desc, eq, inArray, isNotNull, or, type SQL, sql } from 'drizzle-orm'
import type { DrawCard } from '#shared/schemas/api/public.ts'
import type { DrawState } from '#shared/schemas/values.ts'
import type { Database } from '#server/store/database.ts'
import { containing, offsetOf, type Page } from '#server/store/page.ts'
import { draw, prize } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { instantOf, instantOrNull } from '#server/time/instants.ts'

const PAGE_SIZE = 20
const HOME_SIZE = 6
/** States in which the counts are public: from the seal on. */
const COUNTED: readonly DrawState[] = ['sealed', 'drawn', 'concluded', 'failed']
/** A draw is public from its opening on, whatever becomes of it. */
const isPublic = isNotNull(draw.openedAt)

async function cards(
  db: Database,
  input: {
    readonly where: SQL | undefined
    readonly order: readonly SQL[]
    readonly limit: number
    readonly offset?: number
  },
): Promise<DrawCard[]> {
  const prizes = db
    .select({
      drawId: prize.drawId,
      items: sql<number>`sum(${prize.quantity})::int`.as('items'),
      first: sql<string>`(array_agg(${prize.name} order by ${prize.position}))[1]`.as('first_prize'),
    })
    .from(prize)
    .groupBy(prize.drawId)
    .as('prizes')
  const rows = await db
    .select({
      draw,
      organisation: { slug: organisation.slug, name: organisation.name },
      prizes: sql<number>`coalesce(${prizes.items}, 0)`.mapWith(Number),
      firstPrize: prizes.first,
    })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .leftJoin(prizes, eq(prizes.drawId, draw.id))
    .where(and(isPublic, input.where))
    .orderBy(...input.order, asc(draw.slug))
    .limit(input.limit)
    .offset(input.offset ?? 0)
  return rows.map((row) => {
    const counted = COUNTED.includes(row.draw.state)
    return {
      slug: row.draw.slug,
      title: row.draw.title,
      organisation: row.organisation,
      goodCause: row.draw.goodCause,
      state: row.draw.state,
      demo: row.draw.demo,
      timeZone: row.draw.timeZone,
      closesAt: instantOf(row.draw.closesAt),
      drawAt: instantOf(row.draw.drawAt),
      drawnAt: instantOrNull(row.draw.drawnAt),
      entrants: counted ? row.draw.entrantCount : null,
      tickets: counted ? row.draw.ticketCount : null,
      prizes: row.prizes,
      firstPrize: row.firstPrize ?? null,
    }
  })
}

/** What is sealed, open and lately drawn. */
export async function getHome(
  db: Database,
): Promise<{ readonly upcoming: DrawCard[]; readonly recent: DrawCard[]; readonly open: DrawCard[] }> {
  const [upcoming, recent, open] = await Promise.all([
    cards(db, { where: eq(draw.state, 'sealed'), order: [asc(draw.drawAt)], limit: HOME_SIZE }),
    cards(db, { where: inArray(draw.state, ['drawn', 'concluded']), order: [desc(draw.drawnAt)], limit: HOME_SIZE }),
    cards(db, { where: inArray(draw.state, ['open', 'closed']), order: [asc(draw.closesAt)], limit: HOME_SIZE }),
  ])
  return { upcoming, recent, open }
}

/** The public draws whose title, good cause or organisation holds the words; the latest draw time first. */
export async function searchDraws(
  db: Database,
  input: { readonly q: string; readonly state: DrawState | 'all'; readonly page: number },
): Promise<Page<DrawCard>> {
  const pattern = containing(input.q.trim())
  const where = and(
    input.state === 'all' ? undefined : eq(draw.state, input.state),
    input.q.trim() === ''
      ? undefined
      : or(
          sql`lower(${draw.title}) like ${pattern}`,
          sql`lower(${draw.goodCause}) like ${pattern}`,
          sql`lower(${organisation.name}) like ${pattern}`,
        ),
  )
  const [items, counted] = await Promise.all([
    cards(db, { where, order: [desc(draw.drawAt)], limit: PAGE_SIZE, offset: offsetOf(input.page, PAGE_SIZE) }),
    db
      .select({ total: sql<number>`count(*)::int` })
      .from(draw)
      .innerJoin(organisation, eq(organisation.id, draw.organisationId))
      .where(and(isPublic, where)),
  ])
  return { items, total: counted[0]?.total ?? 0, page: input.page, pageSize: PAGE_SIZE }
}

/** The public draws of one organisation, the latest draw time first. */
export const cardsOfOrganisation = (db: Database, organisationId: string): Promise<DrawCard[]> =>
  cards(db, { where: eq(draw.organisationId, organisationId), order: [desc(draw.drawAt)], limit: 500 })
