import { and, asc, between, eq, lt, sql } from 'drizzle-orm'
import { branchOf, ticketsStillIn, turnedAway } from '#shared/sampling/branch.ts'
import type { EntryPick, EntryWalk } from '#shared/schemas/api/entry.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { offsetOf, type Page } from '#server/store/page.ts'
import { result, resultPick } from '#server/store/schema/result.ts'
import { sealedEntryOf } from './entry-receipt.ts'
import type { EntryAccess } from './entry-access.ts'
import { inclusionOf } from './leaf-proofs.ts'
import { picksOf, presentAward } from './picks.ts'
import { sealInForce, sealOf, sealsOf } from './seals.ts'

const PAGE_SIZE = 50

/** What the picks of a drawn draw are told from, for one entrant; null before the draw. */
async function settledFor(db: Database, { drawId, entrantId }: EntryAccess) {
  const [settled] = await db.select().from(result).where(eq(result.drawId, drawId))
  const row = settled ? sealInForce(await sealsOf(db, drawId)) : null
  const own = row ? await sealedEntryOf(db, row.id, entrantId) : null
  if (!settled || !row || !own) return null
  const seal = sealOf(row)
  const won = await db
    .select()
    .from(resultPick)
    .where(and(eq(resultPick.drawId, drawId), eq(resultPick.leaf, own.person.leaf)))
    .orderBy(asc(resultPick.pick))
  const present = (pick: typeof resultPick.$inferSelect): EntryPick => ({
    pick: pick.pick,
    award: presentAward(seal, pick),
    mine: ticketsStillIn(seal.rule, own.tickets, won.filter((earlier) => earlier.pick < pick.pick).length),
    remaining: pick.remaining,
    ...turnedAway(own.person.leaf, pick.leaf, seal.entries.count),
  })
  return { settled, row, seal, own, won, present }
}

/** The picks that came to an entrant, and how many picks there were; null before the draw. */
export async function entryResult(db: Database, access: EntryAccess) {
  const found = await settledFor(db, access)
  if (!found) return null
  const won = found.won.map((pick) => ({ pick: pick.pick, award: presentAward(found.seal, pick) }))
  return { pickCount: found.settled.picks, won }
}

/** What happened to an entrant at each pick, 50 at a time; null before the draw. */
export async function entryPicks(db: Database, access: EntryAccess, page: number): Promise<Page<EntryPick> | null> {
  const found = await settledFor(db, access)
  if (!found) return null
  const from = offsetOf(page, PAGE_SIZE)
  const rows = await db
    .select()
    .from(resultPick)
    .where(and(eq(resultPick.drawId, access.drawId), between(resultPick.pick, from, from + PAGE_SIZE - 1)))
    .orderBy(asc(resultPick.pick))
  return { items: rows.map(found.present), total: found.settled.picks, page, pageSize: PAGE_SIZE }
}

/** One walk along an entrant's branch; null before the draw, and where there is no such pick. */
export async function entryWalk(
  { db, sha256 }: Pick<Services, 'db' | 'sha256'>,
  access: EntryAccess,
  pick: number,
): Promise<EntryWalk | null> {
  const found = await settledFor(db, access)
  if (!found) return null
  const { row, seal, own } = found
  const { drawId } = access
  const { leaf } = own.person
  const [[summary], [walked], proof, removedBetween] = await Promise.all([
    picksOf(db, { drawId, seal, from: pick, to: pick }),
    db
      .select()
      .from(resultPick)
      .where(and(eq(resultPick.drawId, drawId), eq(resultPick.pick, pick))),
    inclusionOf({ db, sha256 }, { seal: row.digest, leaf }),
    removedBefore(db, drawId, seal.rule, pick, leaf),
  ])
  if (!summary || !walked || !proof) return null
  const about = found.present(walked)
  const size = seal.entries.count
  const branch = branchOf({ leaf, size, ticketsIn: about.mine, path: proof.path }, summary.coins, removedBetween)
  return {
    ...about,
    walk: branch.map((coin, index) => ({ coin: summary.coins[index] ?? [0, 0, '', 'H'], ...coin })),
    winner: { tickets: summary.ticketsIn, label: summary.label },
  }
}

/**
 * How many tickets the picks before `pick` took out of the leaves from `from` up to but not including `to`, for leaves
 * before the entrant's own: read once, since each coin of the walk asks for another range that ends there.
 */
async function removedBefore(
  db: Database,
  drawId: string,
  rule: 'one-prize-each' | 'every-ticket',
  pick: number,
  leaf: number,
): Promise<(from: number, to: number) => number> {
  const taken = rule === 'one-prize-each' ? sql<number>`max(${resultPick.ticketsIn})` : sql<number>`count(*)`
  const rows = await db
    .select({ leaf: resultPick.leaf, tickets: taken.mapWith(Number) })
    .from(resultPick)
    .where(and(eq(resultPick.drawId, drawId), lt(resultPick.pick, pick), lt(resultPick.leaf, leaf)))
    .groupBy(resultPick.leaf)
  return (from, to) => rows.reduce((sum, row) => sum + (row.leaf >= from && row.leaf < to ? row.tickets : 0), 0)
}
