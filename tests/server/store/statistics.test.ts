import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { getStatistics } from '#server/store/queries/statistics.ts'
import { resultPick } from '#server/store/schema/result.ts'
import { sealedLeaf } from '#server/store/schema/seal.ts'
import { result } from '#server/store/schema/result.ts'
import { asc, eq } from 'drizzle-orm'
import { makeOffice, makeSealed } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
let site: TestSite
beforeAll(async () => {
  site = await startTestSite({ clock })
}, 60_000)
afterAll(() => site.close())

describe('the entry order over the draws of a site', () => {
  it('comes from each pick’s place among the tickets that were in, worked out here from the sealed list alone', async () => {
    const { services } = site
    expect(await getStatistics(services)).toMatchObject({ draws: 0, picks: 0, order: null })
    const office = await makeOffice(services, { demo: true })
    const ids: string[] = []
    for (const rule of ['one-prize-each', 'every-ticket'] as const) {
      ids.push(await makeSealed(services, office, { title: `Order, ${rule}`, rule }))
    }
    clock.advance(3600_000)
    for (const draw of ids) await settleDraw(services, goOn, { draw })
    let [picks, drift, variance] = [0, 0, 0]
    for (const [index, drawId] of ids.entries()) {
      const [settled] = await services.db.select().from(result).where(eq(result.drawId, drawId))
      const leaves = await services.db
        .select({ tickets: sealedLeaf.tickets })
        .from(sealedLeaf)
        .where(eq(sealedLeaf.sealId, settled?.sealId ?? 0))
        .orderBy(asc(sealedLeaf.leaf))
      const left = leaves.map(({ tickets }) => tickets)
      const order = await services.db
        .select({ leaf: resultPick.leaf })
        .from(resultPick)
        .where(eq(resultPick.drawId, drawId))
        .orderBy(asc(resultPick.pick))
      for (const { leaf } of order) {
        const total = left.reduce((sum, tickets) => sum + tickets, 0)
        const before = left.slice(0, leaf).reduce((sum, tickets) => sum + tickets, 0)
        picks += 1
        drift += (before + (left[leaf] ?? 0) / 2) / total - 0.5
        variance += (1 - left.reduce((sum, tickets) => sum + (tickets / total) ** 3, 0)) / 12
        left[leaf] = index === 0 ? 0 : (left[leaf] ?? 0) - 1
      }
    }
    const found = await getStatistics(services)
    expect(found).toMatchObject({ draws: 2, picks })
    expect(picks).toBe(6)
    expect(found.order?.z).toBeCloseTo(drift / Math.sqrt(variance), 9)
    expect(found.order?.mean).toBeCloseTo(0.5 + drift / picks, 9)
  })
})
