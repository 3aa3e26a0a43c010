import { and, asc, desc, eq, lt, or, sql } from 'drizzle-orm'
import type {
  getOrganisationForAdministrator as oneEndpoint,
  getSiteState as stateEndpoint,
  OrganisationRow,
} from '#shared/schemas/api/administrator.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { containing, offsetOf, type Page } from '#server/store/page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { mail, serviceCheck, workerHeartbeat } from '#server/store/schema/operation.ts'
import { organisation } from '#server/store/schema/people.ts'
import { witnessStates } from './cosignatures.ts'
import { drawsWithWaitingSeal } from './sealings.ts'
import { archive } from '#server/store/schema/result.ts'
import { seal } from '#server/store/schema/seal.ts'
import { instantOf, instantOrNull } from '#server/time/instants.ts'
import { jobStates } from './jobs.ts'
import { listPeople } from './people.ts'

const PAGE_SIZE = 20
/** A draw is overdue once its round is past by so much, in milliseconds. */
const OVERDUE_AFTER = 60_000

const columns = {
  organisation,
  people: sql<number>`(select count(*)::int from membership m where m.organisation_id = organisation.id)`,
  draws: sql<
    Record<string, number>
  >`coalesce((select jsonb_object_agg(s.state, s.n) from (select state, count(*) as n from draw d where d.organisation_id = organisation.id group by state) s), '{}')`,
}

function present(row: {
  organisation: typeof organisation.$inferSelect
  people: number
  draws: Record<string, number>
}): OrganisationRow {
  const { id, slug, name, registration, address, about, timeZone, currency, state, demo, createdAt, version } =
    row.organisation
  return {
    id,
    slug,
    name,
    registration,
    address,
    about,
    timeZone,
    currency,
    state,
    demo,
    people: row.people,
    draws: row.draws,
    createdAt: instantOf(createdAt),
    version,
  }
}

/** Every organisation, by name. */
export async function listAllOrganisations(
  db: Database,
  input: { readonly q: string; readonly state: 'pending' | 'approved' | 'suspended' | 'all'; readonly page: number },
): Promise<Page<OrganisationRow>> {
  const pattern = containing(input.q.trim())
  const where = and(
    input.state === 'all' ? undefined : eq(organisation.state, input.state),
    input.q.trim() === ''
      ? undefined
      : or(sql`lower(${organisation.name}) like ${pattern}`, sql`${organisation.slug} like ${pattern}`),
  )
  const [rows, counted] = await Promise.all([
    db
      .select(columns)
      .from(organisation)
      .where(where)
      .orderBy(asc(sql`lower(${organisation.name})`), asc(organisation.id))
      .limit(PAGE_SIZE)
      .offset(offsetOf(input.page, PAGE_SIZE)),
    db.select({ total: sql<number>`count(*)::int` }).from(organisation).where(where),
  ])
  return { items: rows.map(present), total: counted[0]?.total ?? 0, page: input.page, pageSize: PAGE_SIZE }
}

/** One organisation by its slug. */
export async function findOrganisationRow(db: Database, slug: string): Promise<OrganisationRow | null> {
  const [row] = await db.select(columns).from(organisation).where(eq(organisation.slug, slug))
  return row ? present(row) : null
}

/** One organisation with its people and invitations: counts and states, no entrants. */
export async function getOrganisationForAdministrator(
  services: Pick<Services, 'db' | 'clock'>,
  slug: string,
): Promise<ResponseOf<typeof oneEndpoint> | null> {
  const [row, listed] = await Promise.all([findOrganisationRow(services.db, slug), listPeople(services, slug)])
  return row && listed ? { organisation: row, people: listed.people, invitations: listed.invitations } : null
}

/** Jobs, mail, beacon and store, as the workers last saw them. */
export async function getSiteState(
  services: Pick<Services, 'db' | 'clock' | 'site' | 'signing'>,
): Promise<ResponseOf<typeof stateEndpoint>> {
  const { db, clock, site } = services
  const now = clock.now()
  const [jobs, [worker], checks, mails, failures, archives, overdue, clockError, waitingSeals, witnesses] =
    await Promise.all([
      jobStates(db),
      db
        .select({ seenAt: sql<Date | null>`max(${workerHeartbeat.seenAt})`.mapWith(workerHeartbeat.seenAt) })
        .from(workerHeartbeat),
      db.select().from(serviceCheck).orderBy(asc(serviceCheck.service), asc(serviceCheck.address)),
      db.select({ state: mail.state, count: sql<number>`count(*)::int` }).from(mail).groupBy(mail.state),
      db
        .select({ at: mail.nextAttemptAt, kind: mail.kind, error: mail.error })
        .from(mail)
        .where(sql`${mail.error} is not null and ${mail.state} in ('queued', 'failed')`)
        .orderBy(desc(mail.nextAttemptAt))
        .limit(20),
      db
        .select({
          archives: sql<number>`count(*)::int`,
          unverified: sql<number>`count(*) filter (where ${archive.verifiedAt} is null)::int`,
        })
        .from(archive),
      overdueDraws(db, new Date(now.getTime() - OVERDUE_AFTER)),
      clockErrorOf(db),
      drawsWithWaitingSeal(db, now).then((draws) => draws.length),
      witnessStates(db, site.witnesses),
    ])
  const count = (state: string) => mails.find((row) => row.state === state)?.count ?? 0
  const check = (service: 'mail' | 'store') => checks.find((row) => row.service === service)
  const unseen = 'No worker has looked at it yet.'
  return {
    now: instantOf(now),
    jobs: { ...jobs, workerSeenAt: instantOrNull(worker?.seenAt ?? null) },
    mail: {
      queued: count('queued'),
      sent: count('sent'),
      failed: count('failed'),
      lastFailures: failures.map((row) => ({ at: instantOf(row.at), kind: row.kind, error: row.error ?? '' })),
      reachable: check('mail')?.ok ?? false,
      detail: check('mail')?.detail ?? unseen,
    },
    beacon: {
      network: site.networkName,
      relays: checks
        .filter((row) => row.service === 'relay')
        .map(({ address, ok, round, milliseconds, detail }) => ({ address, ok, round, milliseconds, detail })),
    },
    timestamps: {
      authorities: checks
        .filter((row) => row.service === 'timestamp')
        .map(({ address, ok, milliseconds, detail }) => ({ address, ok, milliseconds, detail })),
      waiting: waitingSeals,
    },
    witnesses,
    store: {
      bucket: site.bucket,
      reachable: check('store')?.ok ?? false,
      locked: check('store')?.locked ?? false,
      detail: check('store')?.detail ?? unseen,
      archives: archives[0]?.archives ?? 0,
      unverified: archives[0]?.unverified ?? 0,
    },
    overdue,
    keyFingerprint: services.signing.current.fingerprint,
    clockErrorSeconds: clockError,
  }
}

/** Sealed draws whose round came before `since`. */
async function overdueDraws(db: Database, since: Date) {
  const replaced = db.select({ digest: seal.supersedes }).from(seal).where(sql`${seal.supersedes} is not null`)
  const rows = await db
    .select({ slug: draw.slug, title: draw.title, drawAt: draw.drawAt })
    .from(draw)
    .innerJoin(seal, and(eq(seal.drawId, draw.id), sql`${seal.digest} not in ${replaced}`))
    .where(and(eq(draw.state, 'sealed'), lt(seal.beaconRoundAt, since)))
    .orderBy(asc(draw.drawAt))
  return rows.map((row) => ({ ...row, drawAt: instantOf(row.drawAt) }))
}

/** How far this machine's clock is from the database's, in seconds: the database's decides. */
async function clockErrorOf(db: Database): Promise<number> {
  const before = Date.now()
  const { rows } = await db.execute<{ seconds: number }>(
    sql`select extract(epoch from clock_timestamp())::float8 as seconds`,
  )
  const middle = (before + Date.now()) / 2000
  return Math.round((middle - (rows[0]?.seconds ?? middle)) * 1000) / 1000
}
