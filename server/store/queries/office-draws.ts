import { asc, and, desc, eq, exists, ne, sql } from 'drizzle-orm'
import type { listOfficeDraws as listEndpoint, OfficeDraw } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { type DrawFacts, problemsOfOpening, problemsOfSealing, waitingFor } from '#server/store/draw-problems.ts'
import { draw, prize, witness } from '#server/store/schema/draw.ts'
import { entrantPerson } from '#server/store/schema/entrant.ts'
import { organisation } from '#server/store/schema/people.ts'
import { archive, result } from '#server/store/schema/result.ts'
import { instantOf, instantOrNull } from '#server/time/instants.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { moneyOf, prizesOf } from './draw-page.ts'
import { jobsOf } from './jobs.ts'
import { mailCountsOf } from './mail-counts.ts'
import { sealingOf } from './sealings.ts'
import { sealInForce, sealsOf } from './seals.ts'
import { officeWitnessesOf } from './witnesses.ts'

export type DrawRow = typeof draw.$inferSelect
export type OrganisationRow = typeof organisation.$inferSelect

/** What the signed-in person may do with a draw as far as their role goes; the draw's state narrows it. */
export interface DrawRights {
  readonly edit: boolean
  readonly run: boolean
  readonly witness: boolean
}

/** An organisation's draws, newest first; `witnessedBy` narrows them to those that a person watches. Null: no such organisation. */
export async function listOfficeDraws(
  { db, clock }: Pick<Services, 'db' | 'clock'>,
  input: { readonly organisation: string; readonly witnessedBy?: string },
): Promise<ResponseOf<typeof listEndpoint> | null> {
  const [owner] = await db.select().from(organisation).where(eq(organisation.slug, input.organisation))
  if (!owner) return null
  const watched = input.witnessedBy
    ? exists(
        db
          .select({ one: sql`1` })
          .from(witness)
          .where(and(eq(witness.drawId, draw.id), eq(witness.personId, input.witnessedBy))),
      )
    : undefined
  const rows = await db
    .select({
      draw,
      quantities: sql<number[]>`coalesce((select array_agg(p.quantity) from prize p where p.draw_id = draw.id), '{}')`,
    })
    .from(draw)
    .where(
      and(
        eq(draw.organisationId, owner.id),
        watched,
        owner.state === 'suspended' ? ne(draw.state, 'draft') : undefined,
      ),
    )
    .orderBy(desc(draw.createdAt), asc(draw.slug))
    .limit(1000)
  const now = clock.now()
  return {
    organisation: {
      slug: owner.slug,
      name: owner.name,
      state: owner.state,
      timeZone: owner.timeZone,
      currency: owner.currency,
      address: owner.address,
      registration: owner.registration,
    },
    draws: rows.map(({ draw: row, quantities }) => ({
      id: row.id,
      slug: row.slug,
      title: row.title,
      state: row.state,
      demo: row.demo,
      closesAt: instantOf(row.closesAt),
      drawAt: instantOf(row.drawAt),
      entrants: row.entrantCount,
      tickets: row.ticketCount,
      prizes: quantities.reduce((sum, quantity) => sum + quantity, 0),
      waiting: waitingFor(
        factsOf(
          row,
          owner,
          quantities.map((quantity) => ({ quantity })),
        ),
        now,
      ),
    })),
  }
}

/** What opening and sealing depend on, out of the rows. */
export const factsOf = (
  row: DrawRow,
  owner: Pick<OrganisationRow, 'state'>,
  prizes: readonly { readonly quantity: number }[],
): DrawFacts => ({
  state: row.state,
  organisationState: owner.state,
  closesAt: row.closesAt,
  drawAt: row.drawAt,
  entrants: row.entrantCount,
  tickets: row.ticketCount,
  prizes,
  reserves: row.reserves,
})

/** One draw as the office sees it; null where there is none. */
export async function getOfficeDraw(
  { db, clock }: Pick<Services, 'db' | 'clock'>,
  input: { readonly draw: string; readonly rights: DrawRights },
): Promise<OfficeDraw | null> {
  const [found] = await db
    .select({ draw, organisation })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .where(eq(draw.id, input.draw))
  if (!found) return null
  const { draw: row, organisation: owner } = found
  // The drafts of a suspended organisation hide until it is restored.
  if (owner.state === 'suspended' && row.state === 'draft') return null
  const [prizes, withEmail, seals, waiting, witnesses, mail, jobs, [stored], [settled]] = await Promise.all([
    prizesOf(db, row.id),
    withEmailOf(db, row.id),
    sealsOf(db, row.id),
    sealingOf(db, row.id),
    officeWitnessesOf(db, row.id),
    mailCountsOf(db, row.id),
    jobsOf(db, row.id),
    db.select().from(archive).where(eq(archive.drawId, row.id)),
    db.select({ digest: result.digest }).from(result).where(eq(result.drawId, row.id)),
  ])
  const inForce = sealInForce(seals)
  const facts = factsOf(row, owner, prizes)
  const now = clock.now()
  const problems = { open: problemsOfOpening(facts, now), seal: problemsOfSealing(facts, now) }
  return {
    id: row.id,
    version: row.version,
    slug: row.slug,
    slugFixed: row.openedAt !== null,
    title: row.title,
    goodCause: row.goodCause,
    promoterName: row.promoterName,
    promoterAddress: row.promoterAddress,
    licence: row.licence,
    ticketPrice: moneyOf(row.ticketPriceMinor, row.ticketPriceCurrency),
    minimumAge: row.minimumAge,
    terms: row.terms,
    closesAt: instantOf(row.closesAt),
    drawAt: instantOf(row.drawAt),
    closesAtLocal: localFromInstant(row.closesAt, row.timeZone),
    drawAtLocal: localFromInstant(row.drawAt, row.timeZone),
    timeZone: row.timeZone,
    rule: row.rule,
    reserves: row.reserves,
    state: row.state,
    demo: row.demo,
    now: instantOf(now),
    organisation: { slug: owner.slug, name: owner.name, state: owner.state, currency: owner.currency },
    prizes,
    counts: { entrants: row.entrantCount, tickets: row.ticketCount, withEmail },
    openedAt: instantOrNull(row.openedAt),
    closedAt: instantOrNull(row.closedAt),
    sealedAt: instantOrNull(row.sealedAt),
    drawnAt: instantOrNull(row.drawnAt),
    sealDigest: inForce?.digest ?? null,
    sealing: waiting,
    resultDigest: settled?.digest ?? null,
    beaconRoundAt: instantOrNull(inForce?.beaconRoundAt ?? null),
    ...witnesses,
    may: mayOf(row, input.rights, problems, inForce?.beaconRoundAt ?? null, waiting !== null, now),
    problems,
    mail,
    jobs: jobs.filter(({ kind, state }) => state !== 'waiting' || isStillMeant(kind, row.state)),
    archive: stored
      ? {
          key: stored.key,
          bytes: stored.bytes,
          sha256: stored.sha256,
          lockedUntil: instantOrNull(stored.lockedUntil),
          verifiedAt: instantOrNull(stored.verifiedAt),
        }
      : null,
  }
}

/** Whether a job that waits for its time will have anything to do then: it stays in the queue when a draw takes another way. */
function isStillMeant(kind: string, state: DrawRow['state']): boolean {
  if (kind === 'close') return state === 'open'
  if (kind === 'settle') return state === 'sealed'
  return true
}

function mayOf(
  row: DrawRow,
  rights: DrawRights,
  problems: OfficeDraw['problems'],
  roundAt: Date | null,
  waiting: boolean,
  now: Date,
): OfficeDraw['may'] {
  const { state } = row
  const beforeRound = state === 'sealed' && (roundAt === null || now < roundAt)
  const unsealed = state === 'draft' || state === 'open' || state === 'closed'
  return {
    edit: rights.edit && state === 'draft',
    changeEntrants: rights.edit && state === 'open',
    open: rights.run && state === 'draft' && problems.open.length === 0,
    close: rights.run && state === 'open',
    reopen: rights.run && state === 'closed',
    seal: rights.run && state === 'closed' && !waiting && problems.seal.length === 0,
    replaceSeal: rights.run && beforeRound,
    postpone: rights.run && (state === 'open' || state === 'closed' || beforeRound),
    cancel: rights.run && (unsealed || beforeRound),
    state: rights.witness && (state === 'sealed' || state === 'drawn' || state === 'concluded'),
  }
}

export async function withEmailOf(db: Database, drawId: string): Promise<number> {
  const [row] = await db
    .select({ count: sql<number>`count(*)::int` })
    .from(entrantPerson)
    .where(and(eq(entrantPerson.drawId, drawId), sql`${entrantPerson.email} is not null`))
  return row?.count ?? 0
}

/** The prizes of a draw as rows, in their order. */
export const prizeRowsOf = (db: Database, drawId: string) =>
  db.select().from(prize).where(eq(prize.drawId, drawId)).orderBy(asc(prize.position))
