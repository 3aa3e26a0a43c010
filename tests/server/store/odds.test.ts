import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { getDrawOdds, getOfficeOdds } from '#server/store/queries/odds.ts'
import { draw } from '#server/store/schema/draw.ts'
import { getDrawOdds as endpoint } from '#shared/schemas/api/odds.ts'
import { ENTRANTS, makeClosed, makeDraft, makeOffice, makeOpen, makeSealed, type Office } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
const HELD = ENTRANTS.map((line) => Number(line.split(',')[1]))
const TOTAL = HELD.reduce((sum, tickets) => sum + tickets, 0)
let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite({ clock })
  office = await makeOffice(site.services, { demo: true })
}, 60_000)
afterAll(() => site.close())

async function slugOf(id: string): Promise<string> {
  const [row] = await site.services.db.select({ slug: draw.slug }).from(draw).where(eq(draw.id, id))
  return row?.slug ?? ''
}
const publicOdds = async (id: string, tickets?: number) => {
  const odds = await getDrawOdds(site.services, { slug: await slugOf(id), tickets })
  return odds && endpoint.response.parse(odds)
}

describe('a draw’s odds', () => {
  it('sealed: each ticket count of the list, with how many hold it, and the one asked about', async () => {
    const id = await makeSealed(site.services, office, { title: 'Odds, sealed' })
    const odds = await publicOdds(id, 1_000_000)
    expect(odds).toMatchObject({ basis: 'sealed', state: 'ready', entrants: HELD.length, tickets: TOTAL })
    expect(odds?.rows.map(({ tickets, entrants }) => [tickets, entrants])).toEqual(
      [...new Set(HELD)]
        .sort((a, b) => a - b)
        .map((tickets) => [tickets, HELD.filter((held) => held === tickets).length]),
    )
    for (const { tickets, first, total } of odds?.rows ?? []) {
      expect(total).toBe(TOTAL)
      expect(first.over * TOTAL).toBe(first.under * tickets)
    }
    expect(odds?.asked).toMatchObject({ tickets: 1_000_000, entrants: 0, total: TOTAL + 1_000_000 })
    // Everybody's chances of the prizes add up to the prizes.
    const sum = (odds?.rows ?? []).reduce((all, { entrants, prize }) => all + entrants * Number(prize.decimal), 0)
    expect(sum).toBeCloseTo(Math.min(odds?.prizes ?? 0, HELD.length), 7)
    expect(await getOfficeOdds(site.services, { draw: id })).toEqual({ ...odds, asked: null })
  })
  it('open: of one more entrant, without saying who holds what', async () => {
    const odds = await publicOdds(await makeOpen(site.services, office, { title: 'Odds, open' }), 3)
    expect(odds?.basis).toBe('joining')
    expect(odds?.rows.map(({ tickets, entrants, total }) => [tickets, entrants, total])).toEqual([
      [1, 0, TOTAL + 1],
      [5, 0, TOTAL + 5],
      [20, 0, TOTAL + 20],
    ])
    expect(odds?.asked).toMatchObject({ entrants: 0, total: TOTAL + 3 })
  })
  it('a draft and a closed list have none in public; the office sees them, and what more prizes would do', async () => {
    const id = await makeClosed(site.services, office, { title: 'Odds, closed' })
    expect(await publicOdds(id)).toMatchObject({ state: 'empty', rows: [], entrants: 0, tickets: 0 })
    const few = await getOfficeOdds(site.services, { draw: id, prizes: 1 })
    const more = await getOfficeOdds(site.services, { draw: id, prizes: 2 })
    expect([few?.basis, few?.prizes, more?.prizes]).toEqual(['present', 1, 2])
    for (const [index, row] of (few?.rows ?? []).entries()) {
      expect(Number(row.prize.decimal)).toBeCloseTo(row.first.over / row.first.under, 9)
      expect(Number(more?.rows[index]?.prize.decimal)).toBeGreaterThan(Number(row.prize.decimal))
    }
    const draft = await makeDraft(site.services, office, { title: 'Odds, draft' })
    expect(await publicOdds(draft)).toBeNull()
    expect(await getOfficeOdds(site.services, { draw: draft })).toMatchObject({ state: 'empty', rows: [] })
    expect(await getDrawOdds(site.services, { slug: 'no-such-draw' })).toBeNull()
    const expected = await getOfficeOdds(site.services, { draw: draft, entrants: 100, allTickets: 250, tickets: 2 })
    expect(expected).toMatchObject({ basis: 'expected', state: 'ready', entrants: 100, tickets: 250 })
    expect(expected?.asked).toMatchObject({ total: 252, first: { over: 1, under: 126 } })
  })
})
