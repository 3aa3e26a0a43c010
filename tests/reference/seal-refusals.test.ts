// Step 3 of the check: one breach of the rules for a seal at a time, signed all the same.
import { describe, expect, it } from 'vitest'
import { type Changeable, makeArchive } from './archives.ts'
import type { Json } from './record.ts'
import { base, beaconOnly, inside, named, refusals, type Row, tossed, tossesOnly } from './refusals.ts'

const { step } = refusals()

describe('step 3 refuses a seal with', () => {
  const rows: Row[] = [
    [base, 'another format', (s) => void (s.format = 'evenpenny/2'), 'format'],
    [base, 'another kind', (s) => void (s.kind = 'result'), 'kind'],
    [base, 'an unknown member', (s) => void (s.extra = 1), ''],
    [base, 'a missing member', (s) => void delete s.reserves, ''],
    [base, 'an unknown member further in', (s) => void (inside(s, 'organisation').extra = 1), 'organisation'],
    [base, 'a number where text belongs', (s) => void (s.title = 7), 'title'],
    [base, 'true where a number belongs', (s) => void (s.reserves = true), 'reserves'],
    [base, 'a fraction', (s) => void (s.reserves = 1.5), ''],
    [base, 'a negative number', (s) => void (s.reserves = -1), ''],
    [base, 'a number past 2^53', (s) => void (inside(s, 'entries').tickets = 2 ** 53), ''],
    [base, 'text that turns the reading direction', (s) => void (s.title = 'a\u202eb'), ''],
    [base, 'a control character', (s) => void (s.title = 'a\u0007b'), ''],
    [base, 'a line separator', (s) => void (s.title = 'a\u2028b'), ''],
    [base, 'a lone surrogate', (s) => void (s.title = 'a\ud83db'), ''],
    [base, 'no key', (s) => void (s.key = null), 'key'],
    [base, 'no title', (s) => void (s.title = ''), 'title'],
    [
      base,
      'an empty registration',
      (s) => void (inside(s, 'organisation').registration = ''),
      'organisation.registration',
    ],
    [base, 'fewer tickets than entrants', (s) => void (inside(s, 'entries').tickets = 11), 'entries.tickets'],
    [base, 'upper-case hex', (s) => void (s.terms = String(s.terms).toUpperCase()), 'terms'],
    [base, 'short hex', (s) => void (inside(s, 'entries').root = 'ab'), 'entries.root'],
    [base, 'other terms', (s) => void (s.terms = '0'.repeat(64)), 'terms.txt'],
    [base, 'a time that does not exist', (s) => void (s.sealedAt = '2031-02-30T00:00:00Z'), 'sealedAt'],
    [base, 'a leap second', (s) => void (s.sealedAt = '2030-06-30T23:59:60Z'), 'sealedAt'],
    [base, 'a fraction of a second', (s) => void (s.sealedAt = '2031-05-04T19:00:00.0Z'), 'sealedAt'],
    [base, 'a draw 119 seconds after it', (s) => void (s.sealedAt = before(s.drawAt, 119)), 'drawAt'],
    [base, 'a showing of more than a day', (s) => void (s.revealBy = before(s.drawAt, -86401)), 'revealBy'],
    [base, 'a showing before the draw', (s) => void (s.revealBy = before(s.drawAt, 1)), 'revealBy'],
    [base, 'no prize', (s) => void (s.prizes = []), 'prizes'],
    [base, 'a prize id twice', (s) => void (inside(s, 'prizes', 1).id = 'prize-0'), 'prizes[1]'],
    [base, 'a prize of quantity 0', (s) => void (inside(s, 'prizes', 0).quantity = 0), 'prizes[0].quantity'],
    [base, 'more than 100,000 picks', (s) => void (s.reserves = 99_998), 'prizes'],
    [base, 'more than 2,000,000 entrants', (s) => void (inside(s, 'entries').count = 2_000_001), 'entries.count'],
    [base, 'another rule', (s) => void (s.rule = 'one-prize'), 'rule'],
    [base, 'another way to flips', (s) => void (inside(s, 'sources').flips = 'mixed'), 'sources.flips'],
    [base, 'derived flips without a seed', (s) => void (inside(s, 'sources').seedCommit = null), 'sources.seedCommit'],
    [beaconOnly, 'a seed alone', (s) => void (inside(s, 'sources').beacon = null), 'sources'],
    [tossed, 'a seed in a tossed draw', (s) => void (inside(s, 'sources').seedCommit = '0'.repeat(64)), 'sources'],
    [tossed, 'a showing of a tossed draw', (s) => void (s.revealBy = before(s.drawAt, -60)), 'revealBy'],
    [tossed, 'no tosses in a tossed draw', (s) => void (inside(s, 'sources').tosses = null), 'sources.tosses'],
    [base, 'rounds of 7', (s) => void (inside(s, 'sources', 'tosses').roundLength = 7), 'sources.tosses.roundLength'],
    [
      base,
      'rounds of 257',
      (s) => void (inside(s, 'sources', 'tosses').roundLength = 257),
      'sources.tosses.roundLength',
    ],
    [base, 'no minimum', (s) => void (inside(s, 'sources', 'tosses').minimumBits = 0), 'sources.tosses.minimumBits'],
    [
      tossesOnly,
      '63 bits without a beacon',
      (s) => void (inside(s, 'sources', 'tosses').minimumBits = 63),
      'sources.tosses.minimumBits',
    ],
    [base, 'no witness', (s) => void (inside(s, 'sources', 'tosses').witnesses = []), 'sources.tosses.witnesses'],
    [
      base,
      'another network',
      (s) => void (inside(s, 'sources', 'beacon').chain = '0'.repeat(64)),
      'sources.beacon.chain',
    ],
    [
      base,
      'another genesis',
      (s) => void (inside(s, 'sources', 'beacon').genesisTime = 1),
      'sources.beacon.genesisTime',
    ],
    [base, 'another period', (s) => void (inside(s, 'sources', 'beacon').period = 30), 'sources.beacon.period'],
    [
      base,
      'another beacon key',
      (s) => void (inside(s, 'sources', 'beacon').publicKey = '0'.repeat(192)),
      'sources.beacon.publicKey',
    ],
    [base, 'another scheme', (s) => void (inside(s, 'sources', 'beacon').scheme = 'bls'), 'sources.beacon.scheme'],
    [
      base,
      'the round after',
      (s) => void (inside(s, 'sources', 'beacon').round = roundOf(s) + 1),
      'sources.beacon.round',
    ],
    [
      base,
      'the round before',
      (s) => void (inside(s, 'sources', 'beacon').round = roundOf(s) - 1),
      'sources.beacon.round',
    ],
    [base, 'a reason alone', (s) => void Object.assign(s, { supersedes: null, reason: 'why' }), 'reason'],
    [
      base,
      'a replaced seal without a reason',
      (s) => void Object.assign(s, { supersedes: '0'.repeat(64), reason: null }),
      'reason',
    ],
  ]
  it.each(named(rows))('$what', async ({ wish, change, where }) => {
    const { zip } = makeArchive({ ...wish, change: { seal: change } })
    expect(await step(zip)).toBe(where === 'terms.txt' ? '3 terms.txt' : `3 seal.json ${where}`.trim())
  })
})

const roundOf = (seal: Changeable): number => Number(inside(seal, 'sources', 'beacon').round)
const before = (time: Json | undefined, seconds: number): string =>
  new Date(Date.parse(String(time)) - seconds * 1000).toISOString().replace('.000Z', 'Z')

it('is refused at step 2 where it names another key than the one that signed it', async () => {
  const change = { seal: (s: Changeable) => void (s.key = '0'.repeat(64)) }
  expect(await step(makeArchive({ ...base, change }).zip)).toBe('2 seal.json key')
})

it('holds at the edges of the rules that step 3 refuses beyond', async () => {
  const edges = (s: Changeable): void =>
    void Object.assign(s, { sealedAt: before(s.drawAt, 120), revealBy: before(s.drawAt, -86400) })
  expect(await step(makeArchive({ ...base, change: { seal: edges } }).zip)).toBe('holds')
})
