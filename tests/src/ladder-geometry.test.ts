import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { coinShape, fan, miniHeight, miniSize, type LadderCoin } from '#shared/sampling/ladder-shape.ts'
import { sideLabel, weigh } from '#src/features/ladder/geometry.ts'
import { tossCoin } from '#shared/sampling/coin.ts'

const lines = (path: string) =>
  [...path.matchAll(/M([\d.]+) 0L([\d.]+) ([\d.]+)/g)].map((match) => [Number(match[1]), Number(match[2])] as const)

describe('a bar', () => {
  it('gives each side exactly its share of the width', () => {
    expect(coinShape([3, 5, '00', 'H'])).toMatchObject({ leftPercent: 37.5, chosen: 3, start: 0 })
    expect(coinShape([3, 5, '1', 'T'])).toMatchObject({ leftPercent: 37.5, chosen: 5, start: 3 })
  })
  it('calls a coin certain only where one side has nobody left', () => {
    expect(coinShape([0, 9, '', 'T']).certain).toBe(true)
    expect(coinShape([9, 0, '', 'H']).certain).toBe(true)
    expect(coinShape([1, 4_000_000_000, '1', 'T']).certain).toBe(false)
  })
})

describe('a fan', () => {
  it('draws one line between each two tickets, from the chosen side to the full width', () => {
    const drawn = fan(coinShape([4, 6, '1', 'T']))
    expect(drawn.width).toBe(10)
    expect(lines(drawn.lip)).toEqual([
      [4, 0],
      [10, 10],
    ])
    const inner = [...lines(drawn.hair), ...lines(drawn.fine)].sort((a, b) => a[0] - b[0])
    expect(inner).toEqual([1, 2, 3, 4, 5].map((k) => [4 + k, Math.round((k * 10 * 1000) / 6) / 1000]))
    expect(lines(drawn.hair).map(([x]) => x)).toEqual([7])
  })
  it('draws every ticket up to 120 lines and every ⌈n/120⌉th above', () => {
    expect(fan(coinShape([120, 1, '0', 'H'])).ticketsPerStrip).toBe(1)
    const above = fan(coinShape([121, 1, '0', 'H']))
    expect(above.ticketsPerStrip).toBe(2)
    expect(lines(above.hair).length + lines(above.fine).length).toBe(60)
    expect(fan(coinShape([2_400, 1, '0', 'H'])).ticketsPerStrip).toBe(20)
  })
  it('never draws more than 120 lines nor one outside the drawing', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 2 ** 40 }),
        fc.integer({ min: 1, max: 2 ** 40 }),
        fc.boolean(),
        (left, right, heads) => {
          const drawn = fan(coinShape([left, right, '', heads ? 'H' : 'T']))
          const all = [...lines(drawn.hair), ...lines(drawn.fine), ...lines(drawn.lip)]
          expect(all.length).toBeLessThanOrEqual(121)
          for (const [top, foot] of all) {
            expect(top).toBeLessThanOrEqual(drawn.width + 0.001)
            expect(foot).toBeLessThanOrEqual(drawn.width + 0.001)
          }
        },
      ),
    )
  })
})

describe('the label of a side', () => {
  it('loses its glyph under 12 %', () => {
    expect(sideLabel(12, 1).glyph).toBe(true)
    expect(sideLabel(11.9, 1).glyph).toBe(false)
  })
  it('is left out where its figure would be cut off', () => {
    expect(sideLabel(1, 1).figure).toBe('nowhere')
    expect(sideLabel(17, 7).figure).toBe('nowhere')
    expect(sideLabel(20, 6).figure).toBe('wide')
    expect(sideLabel(50, 7).figure).toBe('everywhere')
  })
})

describe('a weighing', () => {
  // 1/3 = 0.010101…, 3/8 = 0.011 in binary: long division by hand.
  it('reads the binary digits of the chance and goes on after the flips', () => {
    const third = weigh([1, 2, '011', 'T'])
    expect(third.rungs.map((rung) => rung.digit).join('')).toBe('010')
    expect(third.rest).toBe('1010')
    expect(third.goesOn).toBe(true)
  })
  it('stops where the digits end', () => {
    const shape = weigh([3, 5, '1', 'T'])
    expect(shape.rungs.map((rung) => rung.digit).join('') + shape.rest).toBe('011')
    expect(shape.goesOn).toBe(false)
  })
  it('agrees with the coin that was tossed, for any coin and any flips', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 2 ** 30 }),
        fc.integer({ min: 1, max: 2 ** 30 }),
        fc.array(fc.boolean(), { minLength: 80, maxLength: 80 }),
        (left, right, bits) => {
          let at = 0
          const fall = tossCoin(left, left + right, { next: () => (bits[at++] ? 1 : 0) })
          if (!fall) throw new Error('eighty flips settle any such coin')
          const coin: LadderCoin = [left, right, fall.flips, fall.heads ? 'H' : 'T']
          const { rungs } = weigh(coin)
          expect(rungs).toHaveLength(fall.flips.length)
          expect(rungs.slice(0, -1).every((rung) => rung.outcome === 'equal')).toBe(true)
          expect(rungs.at(-1)?.outcome).toBe(fall.heads ? 'heads' : 'tails')
        },
      ),
    )
  })
  it('refuses flips that do not settle the coin', () => {
    expect(() => weigh([1, 2, '0', 'T'])).toThrow()
  })
})

describe('a small ladder', () => {
  it('has bars of 7 and fans of 14, and draws long walks closer', () => {
    expect(miniSize(5)).toMatchObject({ bar: 7, fan: 14 })
    expect(miniHeight(5)).toBe(5 * 21 + 9)
    for (const coins of [8, 13, 14, 20]) expect(miniHeight(coins)).toBeLessThanOrEqual(190)
  })
})
