import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { draw, flipsOf, derivedFlips as referenceFlips, transcript } from '#tests/reference/record.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { runDraw } from '#shared/protocol/draw.ts'
import { transcriptBytes } from '#shared/protocol/transcript.ts'
import { derivedFlips, tossedFlips } from '#shared/sampling/flips.ts'
import { CountTree } from '#shared/sampling/walk.ts'

const rules = ['one-prize-each', 'every-ticket'] as const
const tickets = fc.array(
  fc.oneof({ weight: 5, arbitrary: fc.integer({ min: 1, max: 9 }) }, fc.integer({ min: 1, max: 2 ** 32 - 1 })),
  { minLength: 1, maxLength: 40 },
)
const prizes = fc
  .array(fc.integer({ min: 1, max: 4 }), { minLength: 1, maxLength: 4 })
  .map((list) => list.map((quantity, i) => ({ id: `p${i}`, name: `Prize ${i}`, quantity })))

describe('whole draws against the second implementation', () => {
  test('derived: picks, coins, awards and transcript', () => {
    const input = fc.record({
      tickets,
      prizes,
      reserves: fc.nat(4),
      rule: fc.constantFrom(...rules),
      drawKey: fc.uint8Array({ minLength: 32, maxLength: 32 }),
    })
    fc.assert(
      fc.property(input, ({ drawKey, ...rest }) => {
        const ours = runDraw(sha256, { ...rest, flips: { kind: 'derived', drawKey } })
        const theirs = draw(rest, rest.tickets, (pick) => referenceFlips(drawKey, pick)) ?? []
        expect(ours.picks).toEqual(theirs)
        expect(Buffer.from(transcriptBytes(ours.picks)).equals(transcript(theirs))).toBe(true)
        const wanted = rest.prizes.reduce((sum, prize) => sum + prize.quantity, rest.reserves)
        expect(ours.end).toBe(ours.picks.length === wanted ? 'complete' : 'no-tickets')
      }),
      { seed: 23, numRuns: 300 },
    )
  })

  test('tossed: one stream for all picks; dry exactly where the other runs dry, and going on at the same flip', () => {
    const input = fc.record({
      tickets,
      prizes,
      reserves: fc.nat(2),
      rule: fc.constantFrom(...rules),
      bits: fc.array(fc.constantFrom(0, 1), { maxLength: 120 }),
    })
    fc.assert(
      fc.property(input, ({ bits, ...rest }) => {
        const ours = runDraw(sha256, { ...rest, flips: { kind: 'tossed', bits } })
        const stream = flipsOf(bits.join(''))
        const theirs = draw(rest, rest.tickets, () => stream)
        expect(ours.end === 'dry').toBe(theirs === null)
        if (theirs !== null) expect(ours.picks).toEqual(theirs)
        const more = [...bits, ...Array.from({ length: 600 }, (_, i) => ((i * i) >> 3) & 1)]
        const longer = runDraw(sha256, { ...rest, flips: { kind: 'tossed', bits: more } })
        expect(longer.picks.slice(0, ours.picks.length)).toEqual(ours.picks)
        expect(ours.flipsUsed).toBe(ours.picks.flatMap((pick) => pick.coins).reduce((n, coin) => n + coin[2].length, 0))
      }),
      { seed: 29, numRuns: 200 },
    )
  })

  test('one digest over small draws of every size and rule', () => {
    let digest: Uint8Array = new Uint8Array(32)
    for (let n = 1; n <= 24; n += 1) {
      for (const rule of rules) {
        const counts = Array.from({ length: n }, (_, i) => 1 + ((i * 5) % 4))
        const prize = [{ id: 'a', name: 'A', quantity: 5 }]
        const flips = { kind: 'derived', drawKey: digest } as const
        const ours = runDraw(sha256, { tickets: counts, rule, prizes: prize, reserves: 2, flips })
        const theirs = draw({ prizes: prize, reserves: 2, rule }, counts, (pick) => referenceFlips(digest, pick))
        expect(ours.picks).toEqual(theirs)
        digest = sha256(transcriptBytes(ours.picks))
      }
    }
    expect(toHex(digest)).toBe('895013c174e5e863dc70dd868322db3a1724cf4bc5782ce7a949e31cbb79da2c')
  })
})

describe('the counts', () => {
  test('a walk that runs dry changes nothing', () => {
    const tree = new CountTree([1, 2, 3])
    expect(tree.walk(tossedFlips([0]))).toBeNull()
    expect([tree.remaining, tree.ticketsOf(0), tree.ticketsOf(1), tree.ticketsOf(2)]).toEqual([6, 1, 2, 3])
  })
  test('what leaves is all of a leaf or one ticket', () => {
    const tree = new CountTree([4, 2, 3])
    tree.remove(0, 'every-ticket')
    expect([tree.remaining, tree.ticketsOf(0)]).toEqual([8, 3])
    tree.remove(0, 'one-prize-each')
    expect([tree.remaining, tree.ticketsOf(0)]).toEqual([5, 0])
    expect(() => tree.remove(0, 'every-ticket')).toThrow(RangeError)
    expect(() => tree.remove(3, 'every-ticket')).toThrow(RangeError)
  })
  test('nothing is drawn from nothing', () => {
    const tree = new CountTree([1])
    tree.remove(0, 'every-ticket')
    expect(() => tree.walk(tossedFlips([]))).toThrow(RangeError)
  })
  test.each([[[]], [[-1]], [[0.5]], [['1']], [[true]], [[2 ** 53]], [[2 ** 53 - 1, 1]]])(
    '%j are no counts',
    (counts) => {
      expect(() => new CountTree(counts as number[])).toThrow(RangeError)
    },
  )
  test('a thousand picks from a million entrants take well under a second, counts included', () => {
    const counts = Float64Array.from({ length: 1_000_000 }, (_, i) => 1 + (i % 50))
    const started = performance.now()
    const input = { tickets: counts, rule: 'one-prize-each', prizes: [{ id: 'a', name: 'A', quantity: 1000 }] } as const
    const flips = { kind: 'derived', drawKey: new Uint8Array(32) } as const
    expect(runDraw(sha256, { ...input, reserves: 0, flips }).picks.length).toBe(1000)
    // The goal is 200 ms on the machine of record; the bench holds to that, this only catches another order of growth.
    expect(performance.now() - started).toBeLessThan(2000)
  })
})

/** Pearson's chi-square of observed counts against expected ones. */
function chiSquare(observed: readonly number[], expected: readonly number[]): number {
  return observed.reduce((sum, o, i) => sum + (o - (expected[i] as number)) ** 2 / (expected[i] as number), 0)
}

describe('pick frequencies', () => {
  const weights = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10]
  const total = 55
  const runs = 400_000
  // NIST/SEMATECH e-Handbook 1.3.6.7.4, chi-square with 9 degrees of freedom, upper 0.001 point (from memory).
  const CRITICAL = 27.877

  function frequencies(skew: (walk: number, leaf: number) => number): number[] {
    const tree = new CountTree(weights)
    const stream = derivedFlips(sha256, new Uint8Array(32).fill(9), 0)
    const counts = weights.map(() => 0)
    for (let i = 0; i < runs; i += 1) {
      const leaf = skew(i, tree.walk(stream)?.leaf as number)
      counts[leaf] = (counts[leaf] as number) + 1
    }
    return counts
  }
  const expected = weights.map((weight) => (runs * weight) / total)

  test('agree with tickets over tickets in', () => {
    expect(
      chiSquare(
        frequencies((_, leaf) => leaf),
        expected,
      ),
    ).toBeLessThan(CRITICAL)
  })
  test('the same measure flags a draw in which 0.25 % of the picks are moved to one entrant', () => {
    expect(
      chiSquare(
        frequencies((i, leaf) => (i % 400 === 0 ? 0 : leaf)),
        expected,
      ),
    ).toBeGreaterThan(CRITICAL)
  })

  // Successive sampling without replacement; Yates and Grundy 1953 among them: outside/successive_sampling_inclusion.json.
  interface Populations {
    populations: Record<
      string,
      { weights: number[]; draws: number; inclusion: number[]; position_probabilities: string[][] }
    >
  }
  const { populations } = JSON.parse(
    readFileSync(join(import.meta.dirname, '../../outside/successive_sampling_inclusion.json'), 'utf8'),
  ) as Populations
  test.each(Object.entries(populations))('chances without replacement: %s', (_, population) => {
    const n = 60_000
    const stream = derivedFlips(sha256, new Uint8Array(32).fill(3), 1)
    const included = population.weights.map(() => 0)
    for (let i = 0; i < n; i += 1) {
      const tree = new CountTree(population.weights)
      for (let k = 0; k < population.draws; k += 1) {
        const leaf = tree.walk(stream)?.leaf as number
        tree.remove(leaf, 'one-prize-each')
        included[leaf] = (included[leaf] as number) + 1
      }
    }
    population.inclusion.forEach((chance, leaf) => {
      const deviation = Math.abs((included[leaf] as number) / n - chance) / Math.sqrt((chance * (1 - chance)) / n)
      // Four standard deviations: for honest chances about 1 in 16,000, and the seed is fixed.
      expect(deviation).toBeLessThan(4)
    })
  })
})
