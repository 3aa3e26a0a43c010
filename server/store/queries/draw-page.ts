import { and, asc, eq, isNotNull } from 'drizzle-orm'
import type { DrawPage, PickPage } from '#shared/schemas/api/public.ts'
import { roundTime } from '#shared/protocol/networks.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { draw, prize } from '#server/store/schema/draw.ts'
import { receiptOpening } from '#server/store/schema/entry.ts'
import { organisation } from '#server/store/schema/people.ts'
import { archive, result, settling } from '#server/store/schema/result.ts'
import { dateOf, instantOf, instantOrNull } from '#server/time/instants.ts'
import { historyOf } from './log.ts'
import { awardOf, flipsOf, picksOf, winningLeavesOf } from './picks.ts'
import { presentSeal, sealInForce, sealOf, type SealRow, sealsOf } from './seals.ts'
import { spreadOf } from './spread.ts'
import { witnessesOf } from './witnesses.ts'

/** `picks` of a draw page holds so many; the rest is on the pick pages. */
const PICKS_ON_PAGE = 200

type DrawRow = typeof draw.$inferSelect
type Reading = Pick<Services, 'db' | 'clock'>

async function publicDraw(db: Database, slug: string) {
  const [row] = await db
    .select({ draw, organisation })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .where(and(eq(draw.slug, slug), isNotNull(draw.openedAt)))
  return row ?? null
}

/** One draw in whatever state it is; null for a draft, or where there is none. */
export async function getDraw({ db, clock }: Reading, slug: string): Promise<DrawPage | null> {
  const found = await publicDraw(db, slug)
  if (!found) return null
  const { draw: row, organisation: owner } = found
  const seals = await sealsOf(db, row.id)
  const inForce = sealInForce(seals)
  const [prizes, witnesses, history, settled, waiting] = await Promise.all([
    prizesOf(db, row.id),
    witnessesOf(db, row.id),
    historyOf(db, row.id),
    resultOf(db, row.id, inForce),
    waitingOf({ db, clock }, row, inForce),
  ])
  return {
    slug: row.slug,
    title: row.title,
    goodCause: row.goodCause,
    organisation: {
      slug: owner.slug,
      name: owner.name,
      registration: owner.registration,
      suspended: owner.state === 'suspended',
    },
    promoter: { name: row.promoterName, address: row.promoterAddress },
    licence: row.licence,
    state: row.state,
    demo: row.demo,
    timeZone: row.timeZone,
    now: instantOf(clock.now()),
    terms: row.terms,
    ticketPrice: moneyOf(row.ticketPriceMinor, row.ticketPriceCurrency),
    minimumAge: row.minimumAge,
    rule: row.rule,
    reserves: row.reserves,
    prizes,
    openedAt: instantOrNull(row.openedAt),
    closesAt: instantOf(row.closesAt),
    closedAt: instantOrNull(row.closedAt),
    drawAt: instantOf(row.drawAt),
    drawnAt: instantOrNull(row.drawnAt),
    witnesses,
    seal: inForce ? presentSeal(inForce) : null,
    receiptsOpened: inForce ? await receiptsOpenedOf(db, inForce.id) : null,
    replacedSeals: seals.filter((seal) => seal !== inForce).map(presentSeal),
    waiting,
    result: settled,
    spread: inForce ? await spreadOf(db, inForce, settled ? await winningLeavesOf(db, row.id) : []) : null,
    history,
  }
}

/** One walk, coin by coin; null where there is no such draw, result or pick. */
export async function getPick(
  { db }: Reading,
  input: { readonly slug: string; readonly pick: number },
): Promise<PickPage | null> {
  const found = await publicDraw(db, input.slug)
  if (!found) return null
  const { draw: row, organisation: owner } = found
  const [settled] = await db.select().from(result).where(eq(result.drawId, row.id))
  const inForce = sealInForce(await sealsOf(db, row.id))
  if (!settled || !inForce) return null
  const seal = sealOf(inForce)
  const at = (pick: number) => awardOf(db, { drawId: row.id, seal, pick })
  const [[pick], previous, next] = await Promise.all([
    picksOf(db, { drawId: row.id, seal, from: input.pick, to: input.pick }),
    at(input.pick - 1),
    at(input.pick + 1),
  ])
  if (!pick) return null
  return {
    slug: row.slug,
    title: row.title,
    organisation: { slug: owner.slug, name: owner.name },
    timeZone: row.timeZone,
    drawnAt: instantOf(settled.drawnAt),
    demo: row.demo,
    sealDigest: inForce.digest,
    drawKey: settled.drawKey,
    pick,
    pickCount: settled.picks,
    previous,
    next,
  }
}

const receiptsOpenedOf = (db: Database, sealId: number): Promise<number> =>
  db.$count(receiptOpening, eq(receiptOpening.sealId, sealId))

export const moneyOf = (minor: number | null, currency: string | null) =>
  minor === null || currency === null ? null : { minor, currency }

export async function prizesOf(db: Database, drawId: string) {
  const rows = await db.select().from(prize).where(eq(prize.drawId, drawId)).orderBy(asc(prize.position))
  return rows.map((row) => ({
    id: row.code,
    name: row.name,
    quantity: row.quantity,
    donor: row.donor,
    description: row.description,
    value: moneyOf(row.valueMinor, row.valueCurrency),
  }))
}

async function resultOf(db: Database, drawId: string, inForce: SealRow | null): Promise<DrawPage['result']> {
  const [row] = await db
    .select({ result, archive: { bytes: archive.bytes, sha256: archive.sha256 } })
    .from(result)
    .leftJoin(archive, eq(archive.drawId, result.drawId))
    .where(eq(result.drawId, drawId))
  if (!row || !inForce) return null
  const seal = sealOf(inForce)
  const { result: settled } = row
  const [picks, flips] = await Promise.all([
    picksOf(db, { drawId, seal, from: 0, to: PICKS_ON_PAGE - 1 }),
    flipsOf(db, drawId, settled.digest),
  ])
  const { beacon } = seal.sources
  return {
    digest: settled.digest,
    drawnAt: instantOf(settled.drawnAt),
    drawKey: settled.drawKey,
    seed: settled.seed,
    beacon:
      beacon === null || settled.beaconSignature === null || settled.beaconRandomness === null
        ? null
        : { round: beacon.round, signature: settled.beaconSignature, randomness: settled.beaconRandomness },
    transcriptDigest: settled.transcriptDigest,
    picks,
    pickCount: settled.picks,
    flips: { ...flips, histogram: [...flips.histogram] },
    archive: row.archive,
  }
}

/** Why a draw whose round has come is not drawn yet. */
async function waitingOf({ db, clock }: Reading, row: DrawRow, inForce: SealRow | null): Promise<DrawPage['waiting']> {
  const beacon = inForce ? sealOf(inForce).sources.beacon : null
  if (row.state !== 'sealed' || !beacon) return null
  const roundAt = new Date(roundTime(beacon, beacon.round) * 1000)
  if (clock.now() < roundAt) return null
  const [noted] = await db.select().from(settling).where(eq(settling.drawId, row.id))
  return noted
    ? { kind: noted.waiting, since: instantOf(noted.since) }
    : { kind: 'settling', since: instantOf(dateOf(instantOf(roundAt))) }
}
