import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import {
  addPick,
  addSums,
  entryOrder,
  EntryOrderOfDraw,
  noPicks,
  type OrderSums,
  spearman,
} from '#shared/statistics/order-tests.ts'
import { chiSquare, chiSquareTail, normalTwoSided, studentTwoSided } from '#shared/statistics/probability-values.ts'
import { logGamma } from '#shared/statistics/special-functions.ts'
import { simulatedDraws } from '#tests/support/simulated-draws.ts'

/** tests/development/statistics-against-scipy.py made it. */
const scipy = JSON.parse(readFileSync('tests/outside/statistics_scipy.json', 'utf8'))
const close = (found: number, right: number) =>
  expect(Math.abs(found - right)).toBeLessThanOrEqual(1e-11 * Math.abs(right))

describe('probability values against SciPy', () => {
  test.each<[number, number, number]>(scipy.chi_square)('chi-square %d, %d', (x, k, p) => close(chiSquareTail(x, k), p))
  test.each<[number, number]>(scipy.normal)('normal %d', (z, p) => close(normalTwoSided(z), p))
  test.each<[number, number, number]>(scipy.student)('Student %d, %d', (t, k, p) => close(studentTwoSided(t, k), p))
  test.each<[number, number]>(scipy.log_gamma)('log Γ(%d)', (x, value) => {
    expect(Math.abs(logGamma(x) - value)).toBeLessThan(1e-13 * Math.max(1, Math.abs(value)))
  })
  test('Pearson’s chi-square: Mendel’s peas, 315, 108, 101 and 32 against 9:3:3:1, give 0.470 (textbooks; from memory)', () => {
    const { value } = chiSquare(
      [315, 108, 101, 32],
      [9, 3, 3, 1].map((share) => (share * 556) / 16),
    )
    expect(value).toBeCloseTo(0.47, 3)
    expect(() => chiSquare([1], [1])).toThrow(RangeError)
  })
  test('Spearman', () => {
    const {
      order,
      rho_p: [rho, p],
    } = scipy.spearman.shuffled as { order: number[]; rho_p: [number, number] }
    const found = spearman(
      order.map((_, i) => i + 1),
      order.map((value) => value + 1),
    )
    close(found.rho, rho)
    close(found.p, p)
    expect(() => spearman([1, 2, 3], [1, 2, 3])).toThrow(RangeError)
  })
})

/** The days of the year with the rank that each was drawn: the United States conscription draw of 1970 (R package vcdExtra, `Draft1970`). */
const draft = readFileSync('tests/outside/conscription_draw_1970.csv', 'utf8')
  .trim()
  .split(/\r?\n/)
  .slice(1)
  .map((line) => line.split(',').map(Number) as [day: number, rank: number])
const DAYS = draft.length

/** The entry order test of a whole list with one ticket each, `order` naming the entrants from 0 as they were picked. */
function sumsOf(order: readonly number[]): OrderSums {
  const left = Array.from({ length: order.length }, (_, i) => i)
  let sums: OrderSums = noPicks
  for (const entrant of order) {
    const before = left.indexOf(entrant)
    sums = addPick(sums, { before, held: 1, remaining: left.length, cubes: left.length })
    left.splice(before, 1)
  }
  return sums
}
function entryOrderOf(order: readonly number[]): { readonly z: number; readonly p: number } {
  const tested = entryOrder(sumsOf(order))
  if (!tested) throw new Error('nothing to test')
  return tested
}
const spearmanOf = (order: readonly number[]) =>
  spearman(
    order.map((entrant) => entrant + 1),
    order.map((_, place) => place + 1),
  )

describe('the conscription draw of 1970', () => {
  const order = [...draft].sort((a, b) => a[1] - b[1]).map(([day]) => day - 1)
  test('is whole, and flagged by both tests: late days were drawn early', () => {
    expect([DAYS, new Set(order).size]).toEqual([366, 366])
    const ranks = spearman(
      draft.map(([day]) => day),
      draft.map(([, rank]) => rank),
    )
    close(ranks.rho, scipy.spearman.conscription[0])
    close(ranks.p, scipy.spearman.conscription[1])
    expect(ranks.rho).toBeCloseTo(-0.226, 3)
    expect(ranks.p).toBeLessThan(0.0001)
    const entries = entryOrderOf(order)
    expect(entries.z).toBeGreaterThan(3.5)
    expect(entries.p).toBeLessThan(0.001)
  })
})

describe('a thousand draws of ours, of as many entrants, to the end', () => {
  const orders = [
    ...simulatedDraws({
      tickets: Array.from({ length: DAYS }, () => 1),
      rule: 'one-prize-each',
      picks: DAYS,
      draws: 1000,
      seed: 'order of entry',
    }),
  ].map((picks) => picks.map((pick) => pick.leaf))
  // 1,000 draws flagged one time in twenty or a hundred: within 3.3 standard deviations of 50 and of 10.
  test.each([
    [0.05, 27, 73],
    [0.01, 0, 20],
  ])('are flagged at the stated rate: %d', (level, least, most) => {
    for (const tested of [entryOrderOf, spearmanOf]) {
      const flagged = orders.filter((order) => tested(order).p < level).length
      expect(flagged).toBeGreaterThanOrEqual(least)
      expect(flagged).toBeLessThanOrEqual(most)
    }
  })
  test('have p spread evenly, by a chi-square of tenths', () => {
    for (const tested of [entryOrderOf, spearmanOf]) {
      const tenths = new Array<number>(10).fill(0)
      for (const order of orders) {
        const tenth = Math.min(9, Math.floor(tested(order).p * 10))
        tenths[tenth] = (tenths[tenth] as number) + 1
      }
      expect(chiSquare(tenths, new Array<number>(10).fill(100)).p).toBeGreaterThan(0.001)
    }
  })
  test('their sum is not flagged, and is where early entrants are secretly a tenth likelier than late ones', () => {
    const sumOf = (some: readonly (readonly number[])[]) =>
      some.map(sumsOf).reduce((all, sums) => addSums(all, sums), noPicks)
    expect(entryOrder(sumOf(orders.slice(0, 100)))?.p).toBeGreaterThan(0.01)
    const tickets = Array.from({ length: DAYS }, (_, i) => 1050 - Math.round((100 * i) / DAYS))
    const skewed = [...simulatedDraws({ tickets, rule: 'one-prize-each', picks: DAYS, draws: 100, seed: 'skewed' })]
    const tested = entryOrder(sumOf(skewed.map((picks) => picks.map((pick) => pick.leaf))))
    expect(tested?.z).toBeLessThan(-4)
    expect(tested?.p).toBeLessThan(0.0001)
  })
})

describe('draws with many tickets, as the site collects them from their walks', () => {
  const tickets = [60, 1, 1, 30, 2, 5, 1, 9, 1, 3, 12, 7]
  const cubes = tickets.reduce((sum, held) => sum + held ** 3, 0)
  test.each(['one-prize-each', 'every-ticket'] as const)(
    '%s: mean and variance are what they should be, over 4,000 draws',
    (rule) => {
      const scores: number[] = []
      let all = noPicks
      for (const picks of simulatedDraws({ tickets, rule, picks: 5, draws: 4000, seed: `weighted ${rule}` })) {
        const draw = new EntryOrderOfDraw(cubes, rule)
        for (const pick of picks) draw.add(pick)
        all = addSums(all, draw.sums())
        scores.push(draw.sums().drift / Math.sqrt(draw.sums().variance))
      }
      expect(all.picks).toBe(20_000)
      expect(Math.abs(entryOrder(all)?.z ?? 9)).toBeLessThan(3)
      const spread = scores.reduce((sum, score) => sum + score * score, 0) / scores.length
      // Its own deviation is about sqrt(2/4000).
      expect(Math.abs(spread - 1)).toBeLessThan(0.09)
    },
  )
  test('the place comes from the coins: heads keep the left edge, tails move past the left side', () => {
    const draw = new EntryOrderOfDraw(4 ** 3 + 2 ** 3 + 3 ** 3 + 1, 'one-prize-each')
    draw.add({
      coins: [
        [6, 4, '1', 'T'],
        [3, 1, '0', 'H'],
      ],
      remaining: 10,
    })
    expect(draw.sums().drift).toBeCloseTo(0.75 - 0.5, 12)
    expect(draw.sums().variance).toBeCloseTo((1 - 100 / 1000) / 12, 12)
    draw.add({ coins: [], remaining: 7 })
    expect(draw.sums().variance).toBeCloseTo((1 - 100 / 1000) / 12 + (1 - 73 / 343) / 12, 12)
  })
  test('nothing drawn is nothing tested', () => expect(entryOrder(noPicks)).toBeNull())
})
