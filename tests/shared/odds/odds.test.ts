import { readFileSync } from 'node:fs'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { enumerateHypergeometric, enumerateSuccessive } from '#shared/odds/enumerate.ts'
import { decimalOf, type Fraction, fractionOf } from '#shared/odds/fraction.ts'
import { atLeastOne } from '#shared/odds/hypergeometric.ts'
import { runOdds } from '#shared/odds/odds.ts'
import { type SuccessiveChances, successiveChances } from '#shared/odds/successive.ts'
import { groupOf, listOfCounts, listOfGroups, type TicketList } from '#shared/odds/ticket-groups.ts'

const outside = (name: string) => JSON.parse(readFileSync(`tests/outside/${name}.json`, 'utf8'))

function chancesOf(list: TicketList, picks: number): SuccessiveChances {
  const run = successiveChances(list, picks)
  for (let step = run.next(); ; step = run.next()) if (step.done === true) return step.value
}
const value = ({ over, under }: Fraction) => Number((over * 10n ** 40n) / under) / 1e40
const error = (found: number, right: number) => Math.abs(found / right - 1)
/** Nine significant digits: half a unit of the ninth. */
const NINE = 5e-10

interface Population {
  readonly weights: number[]
  readonly draws: number
  readonly inclusion_exact: string[]
  readonly inclusion: number[]
}

describe('published and exact chances (successive_sampling_inclusion.json names its sources)', () => {
  const populations: Record<string, Population> = outside('successive_sampling_inclusion').populations
  test.each(Object.entries(populations))('%s', (_name, { weights, draws, inclusion, inclusion_exact }) => {
    const list = listOfCounts(weights)
    const odds = runOdds(list, { rule: 'one-prize-each', prizes: draws, reserves: 0 })
    const { held } = chancesOf(list, draws)
    for (const [entrant, tickets] of weights.entries()) {
      const { prize, first } = odds.of(tickets)
      expect(`${prize.exact?.over}/${prize.exact?.under}`).toBe(inclusion_exact[entrant])
      expect(Number(prize.decimal)).toBeCloseTo(inclusion[entrant] as number, 8)
      const [over = 0n, under = 1n] = (inclusion_exact[entrant] as string).split('/').map(BigInt)
      expect(error(held[groupOf(list, tickets)] as number, value({ over, under }))).toBeLessThan(1e-13)
      expect(first).toEqual(fractionOf(tickets, list.tickets))
    }
  })
})

describe('numbers by SciPy (tests/development/odds-against-scipy.py made them)', () => {
  const scipy = outside('odds_scipy')
  type Row = { groups: [number, number][]; picks: number; chances: number[] }
  const listOf = (row: Row) => listOfGroups(row.groups.map(([tickets, entrants]) => ({ tickets, entrants })))
  test.each<Row>(scipy.wallenius)('mean of Wallenius’s distribution: %j', (row) => {
    const { held } = chancesOf(listOf(row), row.picks)
    for (const [group, chance] of row.chances.entries()) expect(error(held[group] as number, chance)).toBeLessThan(NINE)
  })
  test.each<Row>(scipy.quad)('plain integral: %j', (row) => {
    const { held } = chancesOf(listOf(row), row.picks)
    for (const [group, chance] of row.chances.entries()) expect(error(held[group] as number, chance)).toBeLessThan(NINE)
  })
  test.each<{ total: number; tickets: number; picks: number; chance: number }>(scipy.hypergeom)(
    'hypergeometric: %j',
    ({ total, tickets, picks, chance }) => {
      expect(error(atLeastOne(total, tickets, picks), chance)).toBeLessThan(NINE)
    },
  )
})

describe('the numerics against going through everything', () => {
  const count = fc.oneof(
    fc.integer({ min: 1, max: 6 }),
    fc.integer({ min: 1, max: 500 }),
    fc.integer({ min: 1, max: 2 ** 32 - 1 }),
  )
  test('one-prize-each: every entrant, and one more, of lists level and steep', () => {
    fc.assert(
      fc.property(
        fc.array(count, { minLength: 2, maxLength: 7 }),
        count,
        fc.integer({ min: 1, max: 7 }),
        (counts, more, picks) => {
          const list = listOfCounts(counts)
          const run = chancesOf(list, picks)
          for (const [index, tickets] of counts.entries()) {
            const found = run.held[groupOf(list, tickets)] as number
            if (picks >= counts.length) {
              expect(found).toBe(1)
              continue
            }
            const exact = enumerateSuccessive(
              listOfCounts(counts.filter((_, other) => other !== index)),
              tickets,
              picks,
            )
            expect(error(found, value(exact as Fraction))).toBeLessThan(1e-10)
          }
          if (picks > counts.length) expect(run.joining(more)).toBe(1)
          else
            expect(error(run.joining(more), value(enumerateSuccessive(list, more, picks) as Fraction))).toBeLessThan(
              1e-10,
            )
        },
      ),
      { seed: 31, numRuns: 200 },
    )
  })
  test('every-ticket, where factors are multiplied, added and integrated', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 4000 }),
        fc.integer({ min: 1, max: 4000 }),
        fc.nat(10 ** 6),
        (tickets, picks, rest) => {
          const total = tickets + picks + rest
          const exact = enumerateHypergeometric(total, tickets, picks, 4000) as Fraction
          expect(error(atLeastOne(total, tickets, picks), value(exact))).toBeLessThan(1e-11)
        },
      ),
      { seed: 37, numRuns: 25 },
    )
  })
  test('a small chance keeps its digits', () => {
    expect(
      error(atLeastOne(10 ** 13, 1500, 1200), value(enumerateHypergeometric(10 ** 13, 1500, 1200, 2000) as Fraction)),
    ).toBeLessThan(1e-12)
  })
})

describe('what must add up', () => {
  const forty = listOfGroups(Array.from({ length: 40 }, (_, i) => ({ tickets: i + 1, entrants: 25_000 })))
  test.each([1, 2, 7, 100, 3000, 100_000])('a million entrants: the chances add up to the %i picks', (picks) => {
    const { held } = chancesOf(forty, picks)
    const sum = forty.groups.reduce((total, { entrants }, group) => total + entrants * (held[group] as number), 0)
    expect(error(sum, picks)).toBeLessThan(1e-12)
    for (let group = 1; group < 40; group += 1) expect(held[group]).toBeGreaterThan(held[group - 1] as number)
  })
  test('everybody holding as much: picks over entrants', () => {
    const { held, joining } = chancesOf(listOfGroups([{ tickets: 3, entrants: 4321 }]), 57)
    expect(error(held[0] as number, 57 / 4321)).toBeLessThan(1e-12)
    expect(error(joining(3), 57 / 4322)).toBeLessThan(1e-12)
  })
  test('clocks of every speed at once, around each count of fast ones', () => {
    const steep = listOfGroups([
      { tickets: 1, entrants: 100 },
      { tickets: 1000, entrants: 5 },
      { tickets: 10 ** 6, entrants: 3 },
      { tickets: 4 * 10 ** 9, entrants: 2 },
    ])
    for (const picks of [1, 2, 3, 4, 5, 6, 9, 10, 11, 60, 108, 109]) {
      const { held } = chancesOf(steep, picks)
      const sum = steep.groups.reduce((total, { entrants }, group) => total + entrants * (held[group] as number), 0)
      expect(error(sum, picks)).toBeLessThan(1e-11)
    }
  })
  test('a million entrants and a hundred picks take well under a few seconds', () => {
    const started = performance.now()
    const odds = runOdds(forty, { rule: 'one-prize-each', prizes: 100, reserves: 20 })
    for (const { tickets } of forty.groups) odds.of(tickets)
    expect(performance.now() - started).toBeLessThan(2000)
  })
})

describe('odds as they are shown', () => {
  const list = listOfCounts([5, 12, 3, 9, 20, 7, 1, 1, 40, 2, 6, 36])
  test('prizes alone, and prizes and reserves; a count that nobody holds is one more entrant’s', () => {
    const odds = runOdds(list, { rule: 'every-ticket', prizes: 3, reserves: 2 })
    expect(odds.of(7)).toMatchObject({ entrants: 1, first: { over: 7n, under: 142n } })
    expect(odds.of(1).prize).toEqual({ decimal: '0.0211267606', exact: { over: 3n, under: 142n } })
    expect(odds.of(1).pick.exact).toEqual({ over: 5n, under: 142n })
    expect(odds.of(13)).toMatchObject({ entrants: 0, first: { over: 13n, under: 155n } })
  })
  test('certain only where it is certain', () => {
    const each = runOdds(listOfCounts([1, 2 ** 32 - 1, 1, 1]), { rule: 'one-prize-each', prizes: 3, reserves: 1 })
    expect(each.of(2 ** 32 - 1).prize.decimal).toBe('0.999999999')
    expect(each.of(1).pick.decimal).toBe('1')
    const every = runOdds(listOfCounts([3, 1]), { rule: 'every-ticket', prizes: 2, reserves: 0 })
    expect([every.of(3).prize.decimal, every.of(1).prize.decimal]).toEqual(['1', '0.500000000'])
  })
  test('decimals are rounded half up, to as many digits', () => {
    expect(decimalOf(fractionOf(1, 3), 9)).toBe('0.333333333')
    expect(decimalOf(fractionOf(2, 3), 9)).toBe('0.666666667')
    expect(decimalOf(fractionOf(5, 10 ** 7), 2)).toBe('0.00000050')
    expect(decimalOf(fractionOf(1995, 10000), 3)).toBe('0.200')
    expect(decimalOf(fractionOf(9999, 10000), 3)).toBe('1.00')
  })
  test.each([[[0]], [[1.5]], [[-1]], [[2 ** 32]]])('%j is no list', (counts) => {
    expect(() => listOfCounts(counts)).toThrow(RangeError)
  })
  test('an empty list has no odds', () => {
    expect(() => runOdds(listOfCounts([]), { rule: 'every-ticket', prizes: 1, reserves: 0 })).toThrow(RangeError)
  })
})
