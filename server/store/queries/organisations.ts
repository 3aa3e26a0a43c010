import { and, asc, desc, eq, ne, or, sql } from 'drizzle-orm'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { listOrganisations as listEndpoint, OrganisationPage } from '#shared/schemas/api/public.ts'
import type { Database } from '#server/store/database.ts'
import { containing, offsetOf } from '#server/store/page.ts'
import { organisation } from '#server/store/schema/people.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { instantOf } from '#server/time/instants.ts'
import { cardsOfOrganisation } from './draw-cards.ts'

const PAGE_SIZE = 20

/** Organisations that were approved, the suspended ones among them, by name. */
export async function listOrganisations(
  db: Database,
  input: { readonly q: string; readonly page: number },
): Promise<ResponseOf<typeof listEndpoint>> {
  const pattern = containing(input.q.trim())
  const where = and(
    ne(organisation.state, 'pending'),
    input.q.trim() === ''
      ? undefined
      : or(sql`lower(${organisation.name}) like ${pattern}`, sql`lower(${organisation.about}) like ${pattern}`),
  )
  const [rows, counted] = await Promise.all([
    db
      .select({
        slug: organisation.slug,
        name: organisation.name,
        about: organisation.about,
        registration: organisation.registration,
        demo: organisation.demo,
        suspended: sql<boolean>`${organisation.state} = 'suspended'`,
        draws: sql<number>`(select count(*)::int from draw d where d.organisation_id = organisation.id and d.opened_at is not null)`,
      })
      .from(organisation)
      .where(where)
      .orderBy(asc(sql`lower(${organisation.name})`), asc(organisation.slug))
      .limit(PAGE_SIZE)
      .offset(offsetOf(input.page, PAGE_SIZE)),
    db.select({ total: sql<number>`count(*)::int` }).from(organisation).where(where),
  ])
  return { items: rows, total: counted[0]?.total ?? 0, page: input.page, pageSize: PAGE_SIZE }
}

/** One organisation and its public draws; null where there is none, or it was never approved. */
export async function getOrganisation(db: Database, slug: string): Promise<OrganisationPage | null> {
  const [row] = await db
    .select()
    .from(organisation)
    .where(and(eq(organisation.slug, slug), ne(organisation.state, 'pending')))
  if (!row) return null
  return {
    slug: row.slug,
    name: row.name,
    registration: row.registration,
    about: row.about,
    address: row.address,
    demo: row.demo,
    suspended: row.state === 'suspended',
    suspension: row.state === 'suspended' ? await suspensionOf(db, row.id) : null,
    draws: await cardsOfOrganisation(db, row.id),
  }
}

/** The suspension in force, as the log tells it. */
async function suspensionOf(db: Database, organisationId: string): Promise<OrganisationPage['suspension']> {
  const [latest] = await db
    .select({ at: logEvent.at, reason: logNote.text })
    .from(logEvent)
    .leftJoin(logNote, eq(logNote.logIndex, logEvent.index))
    .where(and(eq(logEvent.organisationId, organisationId), eq(logEvent.event, 'suspended')))
    .orderBy(desc(logEvent.index))
    .limit(1)
  return latest ? { at: instantOf(latest.at), reason: latest.reason ?? '' } : null
}
