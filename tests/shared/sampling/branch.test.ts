import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { buildSumTree } from '#shared/merkle/sum-tree.ts'
import { branchOf, forksTo, ticketsStillIn, turnedAway } from '#shared/sampling/branch.ts'
import type { FlipStream } from '#shared/sampling/coin.ts'
import { CountTree, type WalkRule } from '#shared/sampling/walk.ts'

/** Any flips: which ones does not matter here. */
function flips(seed: number): FlipStream {
  let state = seed >>> 0
  return {
    next() {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0
      return state >>> 31 === 1 ? 1 : 0
    },
  }
}

/** The tickets still in, leaf by leaf, and nothing else: what a branch is held against. */
function plainWay(counts: readonly number[], own: number, from: number, to: number) {
  const sum = (a: number, b: number) => counts.slice(a, b).reduce((total, count) => total + count, 0)
  return { total: sum(from, to), before: sum(from, own), mine: counts[own] ?? 0 }
}

describe("an entrant's branch of a walk", () => {
  it('has the counts that the whole list gives, at every pick, by both rules', () => {
    const lists = fc.array(fc.integer({ min: 1, max: 9 }), { minLength: 1, maxLength: 40 })
    const rules = fc.constantFrom<WalkRule>('one-prize-each', 'every-ticket')
    fc.assert(
      fc.property(lists, rules, fc.nat(), fc.nat(), (tickets, rule, seed, which) => {
        const own = which % tickets.length
        const sealed = buildSumTree(sha256, tickets, new Uint8Array(tickets.length * 32))
        const tree = new CountTree(tickets)
        const counts = [...tickets]
        const stream = flips(seed)
        const earlier: { leaf: number; tickets: number }[] = []
        for (let pick = 0; pick < 8 && tree.remaining > 0; pick += 1) {
          const walk = tree.walk(stream)
          if (!walk) throw new Error('these flips never end')
          const mine = ticketsStillIn(rule, tickets[own] ?? 0, earlier.filter(({ leaf }) => leaf === own).length)
          expect(mine).toBe(counts[own])
          const branch = branchOf(
            { leaf: own, size: tickets.length, ticketsIn: mine, path: sealed.path(own) },
            walk.coins,
            (from, to) =>
              earlier
                .filter(({ leaf }) => leaf >= from && leaf < to)
                .reduce((sum, { tickets: taken }) => sum + taken, 0),
          )
          const { coins, turnedAt } = turnedAway(own, walk.leaf, tickets.length)
          expect(coins).toBe(walk.coins.length)
          expect(turnedAt === null).toBe(walk.leaf === own)
          expect(branch).toHaveLength(turnedAt ?? walk.coins.length)
          const forks = forksTo(own, tickets.length)
          for (const [index, coin] of branch.entries()) {
            const fork = forks[index]
            if (!fork) throw new Error('a coin without its fork')
            const { total, before, mine: held } = plainWay(counts, own, fork.from, fork.to)
            expect(coin).toEqual({ mine: held, total, before, kept: index + 1 !== turnedAt })
          }
          const taken = rule === 'one-prize-each' ? (counts[walk.leaf] ?? 0) : 1
          counts[walk.leaf] = (counts[walk.leaf] ?? 0) - taken
          earlier.push({ leaf: walk.leaf, tickets: taken })
          tree.remove(walk.leaf, rule)
        }
      }),
      { numRuns: 300 },
    )
  })

  it('forks where a list of seven does: after four, then two, and the last one carried up', () => {
    expect(forksTo(6, 7).map(({ from, split, to, side }) => [from, split, to, side])).toEqual([
      [0, 4, 7, 'R'],
      [4, 6, 7, 'R'],
    ])
    expect(forksTo(1, 7).map(({ split, side }) => [split, side])).toEqual([
      [4, 'L'],
      [2, 'L'],
      [1, 'R'],
    ])
    expect(forksTo(0, 1)).toEqual([])
    expect(() => forksTo(7, 7)).toThrow(RangeError)
  })

  it('refuses a path of another leaf', () => {
    const own = { leaf: 6, size: 7, ticketsIn: 1, path: [] }
    expect(() => branchOf(own, [], () => 0)).toThrow('does not belong')
  })
})
