import { and, asc, between, eq, gt, sql } from 'drizzle-orm'
import type { Award, PickSummary } from '#shared/schemas/api/public.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { parseTranscriptLine } from '#shared/protocol/transcript.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { FlipCounter, type FlipStatistics } from '#shared/sampling/flip-statistics.ts'
import type { Database } from '#server/store/database.ts'
import { openedLabel, resultPick, transcriptLine } from '#server/store/schema/result.ts'
import { Lasting } from './lasting.ts'

const BATCH = 5000
const statistics = new Lasting<FlipStatistics>(200)

/** Names an award by the prizes of the seal. */
export function presentAward(
  seal: Seal,
  pick: { readonly prize: string | null; readonly item: number | null; readonly reserve: number | null },
): Award {
  if (pick.reserve !== null) return { kind: 'reserve', reserve: pick.reserve }
  const index = seal.prizes.findIndex(({ id }) => id === pick.prize)
  const prize = seal.prizes[index]
  if (!prize || pick.item === null) throw new Error('A pick has an award that its seal does not name.')
  return { kind: 'prize', prize: prize.id, name: prize.name, item: pick.item, of: prize.quantity, position: index + 1 }
}

/** Picks `from` to `to`, both included, with their coins and the labels that are open today. */
export async function picksOf(
  db: Database,
  input: { readonly drawId: string; readonly seal: Seal; readonly from: number; readonly to: number },
): Promise<PickSummary[]> {
  const rows = await db
    .select({ pick: resultPick, line: transcriptLine.line, label: openedLabel.label })
    .from(resultPick)
    .innerJoin(
      transcriptLine,
      and(eq(transcriptLine.drawId, resultPick.drawId), eq(transcriptLine.pick, resultPick.pick)),
    )
    .leftJoin(openedLabel, and(eq(openedLabel.drawId, resultPick.drawId), eq(openedLabel.leaf, resultPick.leaf)))
    .where(and(eq(resultPick.drawId, input.drawId), between(resultPick.pick, input.from, input.to)))
    .orderBy(asc(resultPick.pick))
  return rows.map(({ pick, line, label }) => {
    const award = presentAward(input.seal, pick)
    // A reserve is named only when called, also where the same person won a prize.
    const open = award.kind === 'prize' ? label : null
    return {
      pick: pick.pick,
      award,
      leaf: pick.leaf,
      label: open,
      labelState: award.kind === 'reserve' ? 'not-called' : open === null ? 'withheld' : 'open',
      ticketsIn: pick.ticketsIn,
      remaining: pick.remaining,
      coins: coinsOf(line).map(([left, right, flips, fall]) => [left, right, flips, fall]),
    }
  })
}

/** The award of one pick; null where there is no such pick. */
export async function awardOf(
  db: Database,
  input: { readonly drawId: string; readonly seal: Seal; readonly pick: number },
): Promise<{ readonly pick: number; readonly award: Award } | null> {
  const [row] = await db
    .select()
    .from(resultPick)
    .where(and(eq(resultPick.drawId, input.drawId), eq(resultPick.pick, input.pick)))
  return row ? { pick: row.pick, award: presentAward(input.seal, row) } : null
}

/** Flips of all coins of a draw. A result never changes, so they are counted once. */
export function flipsOf(db: Database, drawId: string, resultDigest: string): Promise<FlipStatistics> {
  return statistics.get(resultDigest, async () => {
    const counter = new FlipCounter()
    for (let last = -1; ; ) {
      const lines = await db
        .select({ pick: transcriptLine.pick, line: transcriptLine.line })
        .from(transcriptLine)
        .where(and(eq(transcriptLine.drawId, drawId), gt(transcriptLine.pick, last)))
        .orderBy(asc(transcriptLine.pick))
        .limit(BATCH)
      for (const { line } of lines) for (const coin of coinsOf(line)) counter.add(coin)
      const end = lines.at(-1)
      if (!end) return counter.result()
      last = end.pick
    }
  })
}

/** The leaves that won a prize. */
export async function winningLeavesOf(db: Database, drawId: string): Promise<number[]> {
  const rows = await db
    .select({ leaf: resultPick.leaf, first: sql<number>`min(${resultPick.pick})` })
    .from(resultPick)
    .where(and(eq(resultPick.drawId, drawId), sql`${resultPick.prize} is not null`))
    .groupBy(resultPick.leaf)
    .orderBy(asc(sql`min(${resultPick.pick})`))
  return rows.map(({ leaf }) => leaf)
}

const coinsOf = (line: string) => unwrap(parseTranscriptLine(utf8(line))).coins
