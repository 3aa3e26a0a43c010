import { and, asc, desc, eq, gt, sql } from 'drizzle-orm'
import { utf8 } from '#shared/bytes/bytes.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { parseTranscriptLine } from '#shared/protocol/transcript.ts'
import type { WalkRule } from '#shared/sampling/walk.ts'
import type { StatisticsView } from '#shared/schemas/api/statistics.ts'
import { addSums, entryOrder, EntryOrderOfDraw, noPicks, type OrderSums } from '#shared/statistics/order-tests.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { draw } from '#server/store/schema/draw.ts'
import { result, resultPick, transcriptLine } from '#server/store/schema/result.ts'
import { sealedLeaf } from '#server/store/schema/seal.ts'
import { instantOf } from '#server/time/instants.ts'
import { Lasting } from './lasting.ts'

const MOST_DRAWS = 2000
const BATCH = 5000
/** A result never changes, so its sums are made once; the whole is put together anew every few minutes. */
const sumsOfResults = new Lasting<OrderSums>(MOST_DRAWS)
const together = new Lasting<StatisticsView>(2)
const MINUTES_5 = 300_000

/** The entry order test over the newest drawn draws. Demo draws count only where the site has no others to make. */
export function getStatistics({ db, clock, site }: Pick<Services, 'db' | 'clock' | 'site'>): Promise<StatisticsView> {
  const now = clock.now()
  return together.get(`${site.origin} ${Math.floor(now.getTime() / MINUTES_5)}`, async () => {
    const rows = await db
      .select({ drawId: result.drawId, sealId: result.sealId, digest: result.digest, rule: draw.rule })
      .from(result)
      .innerJoin(draw, eq(draw.id, result.drawId))
      .where(site.developmentChain ? undefined : eq(draw.demo, false))
      .orderBy(desc(result.drawnAt), asc(result.drawId))
      .limit(MOST_DRAWS)
    let sums = noPicks
    for (const row of rows) sums = addSums(sums, await sumsOfResults.get(row.digest, () => sumsOf(db, row)))
    const tested = entryOrder(sums)
    return {
      at: instantOf(now),
      draws: rows.length,
      picks: sums.picks,
      order: tested && { mean: tested.mean, z: tested.z, p: tested.p },
    }
  })
}

async function sumsOf(
  db: Database,
  row: { readonly drawId: string; readonly sealId: number; readonly rule: WalkRule },
): Promise<OrderSums> {
  const [sealed] = await db
    .select({ cubes: sql<number>`coalesce(sum(${sealedLeaf.tickets}::float8 ^ 3), 0)` })
    .from(sealedLeaf)
    .where(eq(sealedLeaf.sealId, row.sealId))
  const order = new EntryOrderOfDraw(sealed?.cubes ?? 0, row.rule)
  for (let last = -1; ; ) {
    const lines = await db
      .select({ pick: resultPick.pick, remaining: resultPick.remaining, line: transcriptLine.line })
      .from(resultPick)
      .innerJoin(
        transcriptLine,
        and(eq(transcriptLine.drawId, resultPick.drawId), eq(transcriptLine.pick, resultPick.pick)),
      )
      .where(and(eq(resultPick.drawId, row.drawId), gt(resultPick.pick, last)))
      .orderBy(asc(resultPick.pick))
      .limit(BATCH)
    for (const { remaining, line } of lines) {
      order.add({ remaining, coins: unwrap(parseTranscriptLine(utf8(line))).coins })
    }
    const end = lines.at(-1)
    if (!end) return order.sums()
    last = end.pick
  }
}
