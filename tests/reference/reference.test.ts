// Archives by the second implementation, judged by the check that ships with every archive.
import { mkdirSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { makeArchive, type Wanted } from './archives.ts'
import { builtCheck, judge, put, runCheck, scratch } from './run-check.ts'

let folder = ''
beforeAll(() => {
  folder = scratch()
  builtCheck()
})
afterAll(() => rmSync(folder, { recursive: true }))

const sources = ['beacon', 'tosses', 'both', 'tossed'] as const
const rules = ['one-prize-each', 'every-ticket'] as const
const sizes = [
  { entrants: 1, quantities: [1], reserves: 0 },
  { entrants: 2, quantities: [1, 1], reserves: 1 },
  { entrants: 3, quantities: [2], reserves: 4 },
  { entrants: 23, quantities: [1, 5, 2], reserves: 3 },
  { entrants: 150, quantities: [12], reserves: 5 },
]
const wanted: Wanted[] = sources.flatMap((source) =>
  rules.flatMap((rule) =>
    sizes.map((size) => ({
      seed: `${source}-${rule}-${size.entrants}`,
      sources: source,
      rule,
      ...size,
      roundLength: 24,
    })),
  ),
)

describe('an archive by the second implementation', () => {
  it.each(wanted)('holds: $seed', async (wish) => {
    const made = makeArchive(wish)
    const last = wish.entrants - 1
    const outcome = await judge(
      '--test-beacon',
      ...['--key', made.fingerprint],
      put(folder, `${wish.seed}.zip`, made.zip),
      put(folder, `${wish.seed}-receipt.json`, made.receipt(last)),
      put(folder, `${wish.seed}-inclusion.json`, made.inclusion(Math.floor(last / 2))),
    )
    expect(outcome).toMatchObject({ ok: true, step: null, where: null })
    const found = outcome.steps.map((step) => step.found)
    expect(found).toHaveLength(12)
    expect(found[2]).toContain(made.sealDigest)
    expect(found[8]).toContain(`${made.picks.length} picks, ${made.picks.flatMap((pick) => pick.coins).length} coins`)
    expect(found[11]).toContain(`leaf ${last} with ${made.leaves[last]?.tickets} tickets is in the sealed list.`)
  })

  it.each(sources)('ends with fewer picks when the tickets run out: %s', async (source) => {
    for (const rule of rules) {
      const made = makeArchive({
        seed: `dry-${source}-${rule}`,
        sources: source,
        rule,
        entrants: 3,
        mostTickets: 2,
        quantities: [5, 5],
        reserves: 2,
      })
      const tickets = made.leaves.reduce((sum, leaf) => sum + leaf.tickets, 0)
      expect(made.picks).toHaveLength(rule === 'every-ticket' ? tickets : 3)
      const outcome = await judge('--test-beacon', put(folder, `dry-${source}-${rule}.zip`, made.zip))
      expect(outcome.ok, outcome.message).toBe(true)
    }
  })

  it('holds with the greatest ticket counts', async () => {
    const made = makeArchive({
      seed: 'great-counts',
      sources: 'both',
      rule: 'every-ticket',
      entrants: 40,
      mostTickets: 2 ** 32 - 1,
      quantities: [30],
      reserves: 0,
    })
    expect((await judge('--test-beacon', put(folder, 'great.zip', made.zip))).message).toContain('The arithmetic holds')
  })

  it('holds unpacked in a folder, beside files of the person who checks it', async () => {
    const made = makeArchive({
      seed: 'unpacked',
      sources: 'both',
      rule: 'every-ticket',
      entrants: 9,
      quantities: [3],
      reserves: 1,
    })
    const unpacked = join(folder, 'unpacked')
    mkdirSync(unpacked)
    for (const [name, bytes] of made.files) put(unpacked, name, bytes)
    const receipt = put(unpacked, 'my receipt.json', made.receipt(4))
    const outcome = await judge('--test-beacon', unpacked, receipt)
    expect(outcome.ok, outcome.message).toBe(true)
    expect(outcome.steps[11]?.found).toContain('leaf 4')
    expect(outcome.steps[11]?.found).toContain('not examined: my receipt.json')
  })

  it('reports later members, closed labels, an unknown key and what no check can show', async () => {
    const made = makeArchive({
      seed: 'reports',
      sources: 'tosses',
      rule: 'one-prize-each',
      entrants: 9,
      quantities: [3],
      reserves: 1,
      later: { 'timestamp.tsr': 'later' },
      withhold: () => true,
    })
    const { status, stdout } = await runCheck(put(folder, 'reports.zip', made.zip))
    expect(status).toBe(0)
    expect(stdout).toMatch(/^step 1 {2}The archive and its members: /)
    expect(stdout).toContain('Not examined: timestamp.tsr.')
    const winners = made.picks.slice(0, 3).map((pick) => pick.leaf)
    expect(stdout).toContain(`Label withheld for 3 of the winning leaves: leaf ${winners.join(', ')}.`)
    expect(stdout).toContain('The arithmetic holds')
    expect(stdout).toContain('Sealed in time: not shown.')
    expect(stdout).toContain(
      `Signed by an unknown key. Compare all 64 digits with the fingerprint that the site publishes: ${made.fingerprint}`,
    )
    expect(stdout).toContain('whether every ticket sold was entered')
    expect(stdout).not.toContain('TEST')
  })

  it('lets the development chain pass only under its flag, and the verdict names it', async () => {
    const made = makeArchive({
      seed: 'chain',
      sources: 'beacon',
      rule: 'one-prize-each',
      entrants: 4,
      quantities: [1],
      reserves: 0,
    })
    const file = put(folder, 'chain.zip', made.zip)
    expect(await judge(file)).toMatchObject({ ok: false, step: 3, where: 'seal.json sources.beacon.chain' })
    const { status, stdout } = await runCheck('--test-beacon', file)
    expect(status).toBe(0)
    expect(stdout).toContain('THIS IS A TEST: its beacon is the development chain')
  })
})

describe('the command', () => {
  it('takes wrong usage for neither a good nor a bad archive', async () => {
    for (const args of [['--nonsense'], ['--key', 'abcd'], ['--key'], ['missing.zip'], ['missing.json']]) {
      const { status, stdout, stderr } = await runCheck(...args)
      expect(status, args.join(' ')).toBe(2)
      expect(stdout).toBe('')
      expect(stderr).toContain('Usage: node check.mjs')
    }
  })

  it('names the step and the place of a failure, and exits with 1', async () => {
    const made = makeArchive({
      seed: 'fails',
      sources: 'tosses',
      rule: 'every-ticket',
      entrants: 4,
      quantities: [1],
      reserves: 0,
      roundsTooMany: 1,
    })
    const { status, stdout } = await runCheck(put(folder, 'fails.zip', made.zip))
    expect(status).toBe(1)
    expect(stdout).toContain('FAILED at step 8: result.json reveal.tosses: there is a round more than was needed.\n')
    expect(stdout).not.toContain('step 9')
  })

  it('compares the fingerprint that it is given, however it is grouped', async () => {
    const made = makeArchive({
      seed: 'grouped',
      sources: 'tosses',
      rule: 'every-ticket',
      entrants: 4,
      quantities: [1],
      reserves: 0,
    })
    const file = put(folder, 'grouped.zip', made.zip)
    const grouped = made.fingerprint.toUpperCase().replace(/.{8}/g, '$& ')
    expect((await judge('--key', grouped, file)).message).toContain('Signed by the key whose fingerprint was given.')
    const other = made.fingerprint.replace(/^./, (digit) => (digit === '0' ? '1' : '0'))
    expect(await judge('--key', other, file)).toMatchObject({ ok: false, step: 2, where: 'site-key.pem' })
  })
})
