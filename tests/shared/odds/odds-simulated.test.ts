import { readFileSync } from 'node:fs'
import { describe, expect, test } from 'vitest'
import { runOdds } from '#shared/odds/odds.ts'
import { listOfCounts } from '#shared/odds/ticket-groups.ts'
import type { WalkRule } from '#shared/sampling/walk.ts'
import { countPicked } from '#tests/support/simulated-draws.ts'

interface Run {
  readonly tickets: number[]
  readonly rule: WalkRule
  readonly picks: number
  readonly draws: number
  readonly seed: string
  readonly picked: number[]
}

/** How many standard deviations each entrant's count lies from what the odds say. */
function deviations({ tickets, rule, picks, draws, picked }: Run): number[] {
  const odds = runOdds(listOfCounts(tickets), { rule, prizes: picks, reserves: 0 })
  return tickets.map((held, leaf) => {
    const chance = Number(odds.of(held).prize.decimal)
    return ((picked[leaf] as number) - draws * chance) / Math.sqrt(draws * chance * (1 - chance))
  })
}

describe('draws of the product’s own walk against the odds', () => {
  const { runs } = JSON.parse(readFileSync('tests/outside/odds_simulation.json', 'utf8')) as { runs: Run[] }
  test.each(runs)('a million draws, recorded: $rule', (run) => {
    expect(run.draws).toBe(1_000_000)
    // 4 is passed by chance once in 16,000 entrants.
    for (const deviation of deviations(run)) expect(Math.abs(deviation)).toBeLessThan(4)
  })
  test.each(runs)('fewer draws, made now: $rule', (run) => {
    const fewer = { ...run, draws: 5000 }
    const picked = countPicked(fewer)
    for (const deviation of deviations({ ...fewer, picked })) expect(Math.abs(deviation)).toBeLessThan(4)
  })
  test.each(runs)('the other rule’s odds, or a pick more, would be noticed: $rule', (run) => {
    const other = run.rule === 'every-ticket' ? 'one-prize-each' : 'every-ticket'
    for (const wrong of [{ ...run, rule: other } as const, { ...run, picks: run.picks + 1 }]) {
      expect(Math.max(...deviations(wrong).map(Math.abs))).toBeGreaterThan(20)
    }
  })
})
