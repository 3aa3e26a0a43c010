import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { explainCoin, tossCoin, type Flip } from '#shared/sampling/coin.ts'

const streamOf = (flips: string) => {
  let at = 0
  return { next: (): Flip | -1 => (at < flips.length ? (flips[at++] === '1' ? 1 : 0) : -1) }
}

/**
 * The coin told as a comparison of numbers instead of digits: after n flips they stand for v/2^n. Below the first n
 * digits of a/b it is heads, above tails; level with them it is tails where a/b ends there, else it goes on.
 */
function comparedCoin(a: bigint, b: bigint, flips: string): { heads: boolean; flips: string } | null {
  if (a === 0n || a === b) return { heads: a === b, flips: '' }
  for (let n = 1; n <= flips.length; n += 1) {
    const used = flips.slice(0, n)
    const value = BigInt(`0b${used}`)
    const scaled = a << BigInt(n)
    if (value < scaled / b) return { heads: true, flips: used }
    if (value > scaled / b || scaled % b === 0n) return { heads: false, flips: used }
  }
  return null
}

/** Everything that the coin can do within `depth` flips: exact measures over 2^depth, and the flips it takes. */
function enumerate(a: number, b: number, depth: number): { heads: bigint; tails: bigint; open: bigint; flips: bigint } {
  const sum = { heads: 0n, tails: 0n, open: 0n, flips: 0n }
  const visit = (prefix: string): void => {
    const fall = tossCoin(a, b, streamOf(prefix))
    const measure = 1n << BigInt(depth - prefix.length)
    if (fall !== null) {
      expect(fall.flips).toBe(prefix)
      sum[fall.heads ? 'heads' : 'tails'] += measure
      sum.flips += measure * BigInt(prefix.length)
    } else if (prefix.length === depth) {
      sum.open += 1n
      sum.flips += BigInt(depth)
    } else {
      visit(`${prefix}0`)
      visit(`${prefix}1`)
    }
  }
  visit('')
  return sum
}

describe('the coin is exact', () => {
  test('heads have measure a/b, up to one last undecided interval of 2^−24, for every a ≤ b ≤ 40', () => {
    const depth = 24
    for (let b = 1; b <= 40; b += 1) {
      for (let a = 0; a <= b; a += 1) {
        const { heads, tails, open } = enumerate(a, b, depth)
        const [A, B, all] = [BigInt(a), BigInt(b), 1n << BigInt(depth)]
        expect(heads + tails + open).toBe(all)
        expect(open <= 1n).toBe(true)
        expect(heads * B <= A * all && A * all <= (heads + open) * B).toBe(true)
        // Where a/b ends as a binary fraction nothing stays open.
        if (Number.isInteger(Math.log2(b))) expect([heads * B, open]).toEqual([A * all, 0n])
      }
    }
  })

  // Lumbroso 2013 appendix B and enumeration: outside/discrete_sampling_flips.json, bernoulli_expected_flips_examples.
  interface FlipTable {
    bernoulli_expected_flips_examples: Record<string, string>
  }
  const table = JSON.parse(
    readFileSync(join(import.meta.dirname, '../../outside/discrete_sampling_flips.json'), 'utf8'),
  ) as FlipTable
  test.each(Object.entries(table.bernoulli_expected_flips_examples))(
    'a chance of %s takes %s flips',
    (chance, mean) => {
      const [a, b] = chance.split('/').map(Number) as [number, number]
      const [num, den] = `${mean}/1`.split('/').map(Number) as [number, number]
      const depth = 40
      const { flips } = enumerate(a, b, depth)
      // The open interval holds at most two flips more, each with measure 2^−40.
      expect(Math.abs(Number(flips) / 2 ** depth - num / den)).toBeLessThan(1e-9)
    },
  )

  test('no more than two flips on average for any chance', () => {
    for (let b = 1; b <= 40; b += 1) {
      for (let a = 0; a <= b; a += 1) expect(Number(enumerate(a, b, 24).flips) / 2 ** 24).toBeLessThanOrEqual(2)
    }
  })

  test('agrees with a comparison of numbers over the whole range, plain and big', () => {
    const pair = fc
      .tuple(
        fc.oneof(fc.integer({ min: 1, max: 1000 }), fc.integer({ min: 2 ** 51, max: 2 ** 53 - 1 })),
        fc.double({ min: 0, max: 1, noNaN: true }),
      )
      .map(([b, part]) => [Math.min(b, Math.floor(part * b)), b] as const)
    const flips = fc.array(fc.constantFrom('0', '1'), { minLength: 80, maxLength: 80 }).map((list) => list.join(''))
    fc.assert(
      fc.property(pair, flips, ([a, b], text) => {
        const fall = tossCoin(a, b, streamOf(text))
        expect(fall).toEqual(comparedCoin(BigInt(a), BigInt(b), text))
        // The same digits, whichever arithmetic: a/b told with a denominator a power of two larger.
        if (b < 1000) expect(tossCoin(a * 2 ** 43, b * 2 ** 43, streamOf(text))).toEqual(fall)
      }),
      { seed: 17, numRuns: 3000 },
    )
  })

  test('takes no flip where the chance is nothing or all', () => {
    expect(tossCoin(0, 5, streamOf(''))).toEqual({ heads: false, flips: '' })
    expect(tossCoin(5, 5, streamOf(''))).toEqual({ heads: true, flips: '' })
    expect(tossCoin(2 ** 53 - 1, 2 ** 53 - 1, streamOf(''))).toEqual({ heads: true, flips: '' })
  })

  test('says when its stream has run dry', () => {
    expect(tossCoin(1, 3, streamOf('0101'))).toBeNull()
  })

  test.each([
    [-1, 2],
    [3, 2],
    [0, 0],
    [1, 0],
    [0.5, 1],
    [1, Number.NaN],
    [1, 2 ** 53],
    [true, 2],
    ['1', '2'],
    [1n, 2n],
  ])('%s/%s is no chance', (a, b) => {
    expect(() => tossCoin(a as number, b as number, streamOf('0'))).toThrow(RangeError)
    expect(() => explainCoin(a as number, b as number, '0')).toThrow(RangeError)
  })
})

describe('the explanation of a coin', () => {
  test('1/3 is 0.0101… and 010100 falls heads at its sixth digit', () => {
    expect(explainCoin(1, 3, '010100')).toEqual([
      { digit: 0, remainder: 2, flip: 0, outcome: 'equal' },
      { digit: 1, remainder: 1, flip: 1, outcome: 'equal' },
      { digit: 0, remainder: 2, flip: 0, outcome: 'equal' },
      { digit: 1, remainder: 1, flip: 1, outcome: 'equal' },
      { digit: 0, remainder: 2, flip: 0, outcome: 'equal' },
      { digit: 1, remainder: 1, flip: 0, outcome: 'heads' },
    ])
  })
  test('level to the end of 3/4 is tails', () => {
    expect(explainCoin(3, 4, '11').map((rung) => rung.outcome)).toEqual(['equal', 'tails'])
    expect(explainCoin(4, 4, '')).toEqual([])
  })
  test.each(['', '0', '01010', '0101000', '1x'])('flips %j do not settle 1/3 at their end', (flips) => {
    expect(() => explainCoin(1, 3, flips)).toThrow(RangeError)
  })
  test('ends as the coin fell, always', () => {
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 5000 }), fc.nat(), fc.nat(), (b, x, seed) => {
        const a = 1 + (x % (b - 1))
        const text = `${seed.toString(2)}${(seed * 7 + 1).toString(2)}`
        const fall = tossCoin(a, b, streamOf(text))
        if (fall === null) return
        expect(explainCoin(a, b, fall.flips).at(-1)?.outcome).toBe(fall.heads ? 'heads' : 'tails')
      }),
      { seed: 19 },
    )
  })
})
