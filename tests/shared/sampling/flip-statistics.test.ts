import { describe, expect, it } from 'vitest'
import outside from '#tests/outside/discrete_sampling_flips.json' with { type: 'json' }
import { FlipCounter } from '#shared/sampling/flip-statistics.ts'
import { type Flip, tossCoin } from '#shared/sampling/coin.ts'
import type { WalkCoin } from '#shared/sampling/walk.ts'

const LENGTH = 14

/** The distribution of flips of one coin by enumeration: the coin itself is tossed with every string of 14 flips. */
function enumerate(left: number, right: number): { shares: number[]; undecided: number } {
  const shares: number[] = []
  let undecided = 0
  for (let bits = 0; bits < 2 ** LENGTH; bits += 1) {
    let at = 0
    const next = (): Flip | -1 => (at < LENGTH ? (((bits >> (LENGTH - 1 - at++)) & 1) as Flip) : -1)
    const fall = tossCoin(left, left + right, { next })
    if (fall === null) undecided += 1
    else shares[fall.flips.length] = (shares[fall.flips.length] ?? 0) + 2 ** -LENGTH
  }
  return { shares, undecided: undecided * 2 ** -LENGTH }
}

function expectedOf(left: number, right: number, coins: number) {
  const counter = new FlipCounter()
  for (let i = 0; i < coins; i += 1) counter.add([left, right, '0', 'H'])
  return counter.result()
}

describe('FlipCounter', () => {
  it.each([
    [1, 1],
    [1, 3],
    [3, 5],
    [6, 10],
    [1, 2],
    [2, 3],
    [5, 12],
    [1, 1023],
    [341, 683],
  ])('expects of a coin of %i against %i what enumeration gives', (left, right) => {
    const { shares, undecided } = enumerate(left, right)
    const { histogram } = expectedOf(left, right, 2 ** LENGTH)
    for (const { flips, expected } of histogram) {
      if (flips > LENGTH) continue
      expect(Number(expected), `${flips} flips`).toBeCloseTo((shares[flips] ?? 0) * 2 ** LENGTH, 0)
    }
    expect(undecided).toBeLessThanOrEqual(2 ** -LENGTH)
  })
  // Lumbroso, arXiv:1304.1916, appendix B: 2 flips on average unless the chance is dyadic; the examples as collected there.
  it.each(Object.entries(outside.bernoulli_expected_flips_examples))(
    'expects a coin of %s to take %s flips',
    (chance, mean) => {
      const [heads, of] = chance.split('/').map(Number) as [number, number]
      const [above, below = 1] = mean.split('/').map(Number) as [number, number?]
      expect(expectedOf(heads, of - heads, 1).expected).toBe((above / below).toFixed(2))
    },
  )
  it('counts coins, and apart those that a flip decided', () => {
    const counter = new FlipCounter()
    const coins: WalkCoin[] = [
      [3, 0, '', 'H'],
      [0, 4, '', 'T'],
      [1, 1, '0', 'H'],
      [1, 2, '011', 'T'],
      [1, 2, '10', 'T'],
    ]
    for (const coin of coins) counter.add(coin)
    expect(counter.result()).toMatchObject({ coins: 5, coinsWithFlips: 3, flips: 6, expected: '5.00' })
    expect(
      counter
        .result()
        .histogram.slice(0, 3)
        .map(({ flips, coins: taken }) => [flips, taken]),
    ).toEqual([
      [1, 1],
      [2, 1],
      [3, 1],
    ])
  })
})
