import { and, asc, eq, isNotNull, sql } from 'drizzle-orm'
import { setImmediate } from 'node:timers/promises'
import { MAX_PICKS } from '#shared/protocol/limits.ts'
import { type Odds, oddsOf, type OddsTerms } from '#shared/odds/odds.ts'
import { chosenCounts } from '#shared/odds/chosen-counts.ts'
import { listOfGroups, type TicketGroup, type TicketList } from '#shared/odds/ticket-groups.ts'
import type { OddsView } from '#shared/schemas/api/odds.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { draw, prize } from '#server/store/schema/draw.ts'
import { entrant } from '#server/store/schema/entrant.ts'
import { sealedLeaf } from '#server/store/schema/seal.ts'
import { Lasting } from './lasting.ts'
import { presentOdds } from './present-odds.ts'
import { sealInForce, sealOf, type SealRow, sealsOf } from './seals.ts'

/** Worked out once for a sealed list, and at most once a minute for one that still changes. */
const kept = new Lasting<Odds | null>(60)
/** Between two looks at what else waits, and until a reader is told to come back. */
const SLICE_MS = 8
const PATIENCE_MS = 1500
/** A list that still changes is left to the seal where it has more different ticket counts. */
const MOST_PRESENT_COUNTS = 5000
/** What a buyer is told about before the list closes. */
const BEFORE_CLOSING = [1, 5, 20]

type DrawRow = typeof draw.$inferSelect
type Reading = Pick<Services, 'db' | 'clock'>

/** A draw's odds as the public sees them: none between the closing and the seal. Null where there is no such draw. */
export async function getDrawOdds(
  services: Reading,
  input: { readonly slug: string; readonly tickets?: number | undefined },
): Promise<OddsView | null> {
  const [row] = await services.db
    .select()
    .from(draw)
    .where(and(eq(draw.slug, input.slug), isNotNull(draw.openedAt)))
  if (!row) return null
  const inForce = sealInForce(await sealsOf(services.db, row.id))
  if (inForce) return viewOfSeal(services, inForce, input.tickets)
  if (row.state !== 'open') {
    const none = {
      basis: 'present' as const,
      entrants: 0,
      tickets: 0,
      prizes: 0,
      rule: row.rule,
      reserves: row.reserves,
    }
    return presentOdds(none, 'empty')
  }
  return viewOfPresent(services, row, { tickets: input.tickets, basis: 'joining' })
}

/**
 * A draw's odds as its office sees them. `prizes` stands in for the items that are saved; `entrants` and `allTickets`,
 * where both are given, for a list that is not there yet.
 */
export async function getOfficeOdds(
  services: Reading,
  input: {
    readonly draw: string
    readonly tickets?: number | undefined
    readonly prizes?: number | undefined
    readonly entrants?: number | undefined
    readonly allTickets?: number | undefined
  },
): Promise<OddsView | null> {
  const [row] = await services.db.select().from(draw).where(eq(draw.id, input.draw))
  if (!row) return null
  const inForce = sealInForce(await sealsOf(services.db, row.id))
  if (inForce) return viewOfSeal(services, inForce, input.tickets)
  const { entrants, allTickets } = input
  if (entrants !== undefined && allTickets !== undefined) {
    const prizes = input.prizes ?? (await itemsOf(services.db, row.id))
    return viewOfExpected(row, spreadEvenly(entrants, Math.max(entrants, allTickets)), prizes, input.tickets)
  }
  return viewOfPresent(services, row, { tickets: input.tickets, prizes: input.prizes, basis: 'present' })
}

/** The odds of a sealed list. A list with very many different ticket counts takes some time, once. */
export function oddsOfSeal(db: Database, seal: SealRow): Promise<Odds | null> {
  return kept.get(seal.digest, async () => workOut(listOfGroups(await sealedGroups(db, seal)), termsOfSeal(seal)))
}

function termsOfSeal(row: SealRow): OddsTerms {
  const { rule, reserves, prizes } = sealOf(row)
  return { rule, reserves, prizes: prizes.reduce((sum, { quantity }) => sum + quantity, 0) }
}

async function viewOfSeal({ db }: Reading, seal: SealRow, tickets: number | undefined): Promise<OddsView> {
  const about = {
    basis: 'sealed' as const,
    entrants: seal.entrants,
    tickets: seal.tickets,
    ...termsOfSeal(seal),
  }
  return presentOdds(about, await inGoodTime(oddsOfSeal(db, seal)), { chosen: chosenCounts, asked: tickets })
}

/** One more entrant beside a list that somebody expects. */
async function viewOfExpected(
  { rule, reserves }: DrawRow,
  list: TicketList,
  prizes: number,
  tickets: number | undefined,
): Promise<OddsView> {
  const about = { basis: 'expected' as const, entrants: list.entrants, tickets: list.tickets, rule, reserves, prizes }
  if (prizes === 0 || prizes + reserves > MAX_PICKS) return presentOdds(about, 'empty')
  const odds = await workOut(list, { rule, reserves, prizes })
  return presentOdds(about, odds, { chosen: () => BEFORE_CLOSING, asked: tickets })
}

/** A list of so many entrants and tickets in which nobody holds two tickets more than another. */
function spreadEvenly(entrants: number, tickets: number): TicketList {
  const each = Math.floor(tickets / entrants)
  const more = tickets - each * entrants
  return listOfGroups(
    [
      { tickets: each, entrants: entrants - more },
      { tickets: each + 1, entrants: more },
    ].filter((group) => group.entrants > 0),
  )
}

async function viewOfPresent(
  { db, clock }: Reading,
  row: DrawRow,
  options: {
    readonly basis: 'present' | 'joining'
    readonly tickets: number | undefined
    readonly prizes?: number | undefined
  },
): Promise<OddsView> {
  const prizes = options.prizes ?? (await itemsOf(db, row.id))
  const terms: OddsTerms = { rule: row.rule, reserves: row.reserves, prizes }
  const about = { basis: options.basis, entrants: row.entrantCount, tickets: row.ticketCount, ...terms }
  if (row.entrantCount === 0 || prizes === 0 || prizes + row.reserves > MAX_PICKS) return presentOdds(about, 'empty')
  const minute = Math.floor(clock.now().getTime() / 60_000)
  const key = [row.id, row.entrantCount, row.ticketCount, row.rule, row.reserves, prizes, minute].join()
  const odds = await inGoodTime(
    kept.get(key, async () => {
      const groups = await presentGroups(db, row.id)
      // Between the two readings the list may have lost its last entrant.
      if (groups.length === 0 || groups.length > MOST_PRESENT_COUNTS) return null
      return workOut(listOfGroups(groups), terms)
    }),
  )
  const chosen = options.basis === 'joining' ? () => BEFORE_CLOSING : chosenCounts
  return presentOdds(about, odds, { chosen, asked: options.tickets })
}

/** Works the odds out without holding up other requests. */
async function workOut(list: TicketList, terms: OddsTerms): Promise<Odds> {
  const run = oddsOf(list, terms)
  for (let started = performance.now(); ; ) {
    const step = run.next()
    if (step.done === true) return step.value
    if (performance.now() - started < SLICE_MS) continue
    await setImmediate()
    started = performance.now()
  }
}

/** What comes of it, or 'working' where it takes longer than a reader should wait. */
async function inGoodTime(odds: Promise<Odds | null>): Promise<Odds | 'working' | 'unknown'> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<'working'>((resolve) => {
    timer = setTimeout(() => resolve('working'), PATIENCE_MS)
  })
  try {
    return (await Promise.race([odds, late])) ?? 'unknown'
  } finally {
    clearTimeout(timer)
  }
}

const sealedGroups = (db: Database, seal: Pick<SealRow, 'id'>): Promise<TicketGroup[]> =>
  db
    .select({ tickets: sealedLeaf.tickets, entrants: sql<number>`count(*)::int` })
    .from(sealedLeaf)
    .where(eq(sealedLeaf.sealId, seal.id))
    .groupBy(sealedLeaf.tickets)
    .orderBy(asc(sealedLeaf.tickets))

const presentGroups = (db: Database, drawId: string): Promise<TicketGroup[]> =>
  db
    .select({ tickets: entrant.tickets, entrants: sql<number>`count(*)::int` })
    .from(entrant)
    .where(eq(entrant.drawId, drawId))
    .groupBy(entrant.tickets)
    .orderBy(asc(entrant.tickets))

async function itemsOf(db: Database, drawId: string): Promise<number> {
  const [row] = await db
    .select({ items: sql<number>`coalesce(sum(${prize.quantity}), 0)::int` })
    .from(prize)
    .where(eq(prize.drawId, drawId))
  return row?.items ?? 0
}
