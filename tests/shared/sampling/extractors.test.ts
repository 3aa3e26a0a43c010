import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { peres as referencePeres } from '#tests/reference/record.ts'
import { bitText, multiLevel, parseTosses, peres, vonNeumann } from '#shared/sampling/extractors.ts'

const load = <T>(name: string): T =>
  JSON.parse(readFileSync(join(import.meta.dirname, '../../outside', name), 'utf8')) as T
const extractors = [
  ['von Neumann', vonNeumann],
  ['multi-level', multiLevel],
  ['Peres', peres],
] as const

/** Every string of n tosses, as bits. */
function* allTosses(n: number): Generator<Uint8Array> {
  for (let x = 0; x < 2 ** n; x += 1) yield Uint8Array.from({ length: n }, (_, i) => (x >> (n - 1 - i)) & 1)
}
const heads = (tosses: Uint8Array): number => tosses.reduce((sum, toss) => sum + toss, 0)

describe.each(extractors)('%s', (_, extract) => {
  // A biased coin makes all strings with as many heads equally likely, so this is fairness for every bias at once.
  test('for each number of heads, all outputs of a length are equally frequent, to 14 tosses', () => {
    for (let n = 0; n <= 14; n += 1) {
      const counts = new Map<string, number>()
      for (const tosses of allTosses(n)) {
        const key = `${heads(tosses)}:${bitText(extract(tosses))}`
        counts.set(key, (counts.get(key) ?? 0) + 1)
      }
      for (const [key, count] of counts) {
        const [k, bits] = key.split(':') as [string, string]
        for (let other = 0; other < 2 ** bits.length; other += 1) {
          const text = bits === '' ? '' : other.toString(2).padStart(bits.length, '0')
          if (counts.get(`${k}:${text}`) !== count) throw new Error(`${n} tosses, ${k} heads: ${bits} against ${text}`)
        }
      }
      expect(counts.size).toBeGreaterThan(0)
    }
  })
  test('nothing for fewer than two tosses', () => {
    expect([extract([]), extract([1]), extract([0])]).toEqual([[], [], []])
  })
})

test('Peres agrees with the second implementation for all strings to 12 tosses', () => {
  for (let n = 0; n <= 12; n += 1)
    for (const x of allTosses(n)) {
      const text = Array.from(x, (toss) => (toss === 1 ? 'H' : 'T')).join('')
      expect(bitText(peres(parseTosses(text)))).toBe(referencePeres(text))
    }
})

// Exact counts recomputed from the published recursions: outside/coin_debias_rates.json.
describe('yields', () => {
  interface Rates {
    finite_n_exact: Record<
      string,
      { peres_total_bits_by_number_of_ones: number[]; multi_level_total_bits_by_number_of_ones: number[] }
    >
    rates_bits_per_toss: Record<string, { peres_exact_level_1_3: string[] }>
  }
  const rates = load<Rates>('coin_debias_rates.json')
  test.each(Object.entries(rates.finite_n_exact))('exact totals for %s tosses by number of heads', (n, exact) => {
    const totals = (extract: (x: Uint8Array) => readonly number[]): number[] => {
      const sums = new Array<number>(Number(n) + 1).fill(0)
      for (const tosses of allTosses(Number(n))) {
        const k = heads(tosses)
        sums[k] = (sums[k] as number) + extract(tosses).length
      }
      return sums
    }
    expect(totals(peres)).toEqual(exact.peres_total_bits_by_number_of_ones)
    expect(totals(multiLevel)).toEqual(exact.multi_level_total_bits_by_number_of_ones)
  })
  test('von Neumann keeps pq bits a toss, as published', () => {
    for (const [p, row] of Object.entries(rates.rates_bits_per_toss)) {
      const [a, b] = p.split('/').map(BigInt) as [bigint, bigint]
      let bits = 0n
      for (const x of allTosses(8)) {
        const k = BigInt(heads(x))
        bits += BigInt(vonNeumann(x).length) * a ** k * (b - a) ** (8n - k)
      }
      const [num, den] = (row.peres_exact_level_1_3[0] as string).split('/').map(BigInt) as [bigint, bigint]
      expect(bits * den).toBe(num * 8n * b ** 8n)
    }
  })
})

/**
 * Why rounds have a fixed length (the warning of Peres 1992, as kept in outside/peres_stopping_rule_trap.json): bits
 * taken at the moment when enough have come out are not fair.
 */
describe('the stopping rule', () => {
  interface Trap {
    laws: Record<string, { prob: Record<string, [string, number]> }>
  }
  const trap = load<Trap>('peres_stopping_rule_trap.json')

  test.each(Object.entries(trap.laws))(
    'stopping as soon as enough came out gives the published law for %s',
    (name, law) => {
      const [, m, a, b] = /m=(\d) p=(\d+)\/(\d+)/.exec(name)?.map(Number) as [number, number, number, number]
      const measure = new Map<string, bigint>()
      const visit = (x: readonly number[]): void => {
        const bits = bitText(peres(x))
        if (bits.length >= m) {
          const ones = BigInt(x.filter((toss) => toss === 1).length)
          const rest = BigInt(x.length) - ones
          const weight = BigInt(a) ** ones * BigInt(b - a) ** rest * BigInt(b) ** BigInt(14 - x.length)
          const key = bits.slice(0, m)
          measure.set(key, (measure.get(key) ?? 0n) + weight)
        } else if (x.length < 14) {
          for (const pair of [
            [0, 0],
            [0, 1],
            [1, 0],
            [1, 1],
          ])
            visit([...x, ...pair])
        }
      }
      visit([])
      for (const [bits, [exact]] of Object.entries(law.prob)) {
        const [num, den] = `${exact}/1`.split('/').map(BigInt) as [bigint, bigint]
        expect((measure.get(bits) ?? 0n) * den).toBe(num * BigInt(b) ** 14n)
      }
      // From two bits on the law is not fair: 00 is likelier than 01.
      if (m >= 2) expect(new Set(measure.values()).size).toBeGreaterThan(1)
    },
  )

  test('rounds of eight until five bits have come out are fair, whatever the bias', () => {
    // Rounds whose strings have as many heads each are equally likely; so counts by heads settle it for every bias.
    const counts = new Map<string, number>()
    const rounds = [...allTosses(8)].map((x) => ({ k: heads(x), bits: bitText(peres(x)) }))
    for (const first of rounds) {
      if (first.bits.length >= 5) {
        const key = `${first.k}:${first.bits}`
        counts.set(key, (counts.get(key) ?? 0) + 1)
        continue
      }
      for (const second of rounds) {
        const key = `${first.k}+${second.k}/${first.bits.length}:${first.bits}${second.bits}`
        counts.set(key, (counts.get(key) ?? 0) + 1)
      }
    }
    const groups = new Map<string, Set<number>>()
    const sizes = new Map<string, number>()
    for (const [key, count] of counts) {
      const [k, bits] = key.split(':') as [string, string]
      const group = `${k}:${bits.length}`
      groups.set(group, (groups.get(group) ?? new Set()).add(count))
      sizes.set(group, (sizes.get(group) ?? 0) + 1)
    }
    for (const [group, frequencies] of groups) {
      expect(frequencies.size, group).toBe(1)
      expect(sizes.get(group), group).toBe(2 ** Number(group.split(':')[1]))
    }
  })
})

test.each(['h', 'HX', 'H T', '10', 'HT\n'])('%j are not tosses', (text) => {
  expect(() => parseTosses(text)).toThrow(RangeError)
})
