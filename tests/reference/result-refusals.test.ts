// Steps 4 to 11 of the check: one breach in a result or a member at a time, signed and summed all the same.
import { describe, expect, it } from 'vitest'
import { type Changeable, type Made, makeArchive, type Wanted } from './archives.ts'
import { type Json, peres, unhex, utf8 } from './record.ts'
import { base, beaconOnly, inside, named, pem, refusals, type Row, tossed, tossesOnly } from './refusals.ts'

const { step } = refusals()

describe('steps 5 to 9 refuse a result with', () => {
  const rows: Row[] = [
    [base, 'another seal', (r) => void (r.seal = '0'.repeat(64)), '5 result.json seal'],
    [base, 'a time before the draw', (r) => void (r.drawnAt = '2031-05-04T19:29:59Z'), '5 result.json drawnAt'],
    [base, 'a closed seed', (r) => void (inside(r, 'reveal').seed = null), '5 result.json reveal.seed'],
    [beaconOnly, 'tosses of no account', (r) => void (inside(r, 'reveal').tosses = []), '5 result.json reveal.tosses'],
    [
      tossed,
      'a beacon of no account',
      (r) => void (inside(r, 'reveal').beacon = { round: 1, signature: '0' }),
      '5 result.json reveal.beacon',
    ],
    [base, 'item 0', (r) => void (inside(r, 'picks', 0, 'award').item = 0), '5 result.json picks[0].award'],
    [
      base,
      'both kinds of award',
      (r) => void (inside(r, 'picks', 0, 'award').reserve = 1),
      '5 result.json picks[0].award',
    ],
    [base, 'text for a leaf', (r) => void (inside(r, 'picks', 0).leaf = '0'), '5 result.json picks[0].leaf'],
    [base, 'another seed', (r) => void (inside(r, 'reveal').seed = '0'.repeat(64)), '6 result.json reveal.seed'],
    [base, 'another round', (r) => void (inside(r, 'reveal', 'beacon').round = 1), '7 result.json reveal.beacon.round'],
    [
      base,
      'no point for a signature',
      (r) => void (inside(r, 'reveal', 'beacon').signature = 'ff'.repeat(48)),
      '7 result.json reveal.beacon.signature',
    ],
    // Round 1 of the development chain: a good signature, but of another round (tests/vectors/development-chain.json).
    [
      base,
      "another round's signature",
      (r) => void (inside(r, 'reveal', 'beacon').signature = ROUND_1),
      '7 result.json reveal.beacon.signature',
    ],
    [
      base,
      'the point at infinity',
      (r) => void (inside(r, 'reveal', 'beacon').signature = `c0${'00'.repeat(47)}`),
      '7 result.json reveal.beacon.signature',
    ],
    // x = 4 gives a point of the curve (4³ + 4 = 68 has a root) that is not in the subgroup.
    [
      base,
      'a point outside the subgroup',
      (r) => void (inside(r, 'reveal', 'beacon').signature = `80${'00'.repeat(46)}04`),
      '7 result.json reveal.beacon.signature',
    ],
    [base, 'a toss that is neither', (r) => swapToss(r, (t) => `E${t.slice(1)}`), '8 result.json reveal.tosses[0]'],
    [base, 'a short round', (r) => swapToss(r, (t) => t.slice(1)), '8 result.json reveal.tosses[0]'],
    [base, 'no rounds', (r) => void (inside(r, 'reveal').tosses = []), '8 result.json reveal.tosses'],
    [tossed, 'too few rounds for the walks', (r) => void rounds(r).pop(), '8 result.json reveal.tosses'],
    [tossed, 'another toss', (r) => swapToss(r, flipAll), '9 transcript.jsonl line 1'],
    [base, 'another toss in the key', (r) => swapToss(r, flipAll), '9 transcript.jsonl line 1'],
    [base, 'another award', (r) => void (inside(r, 'picks', 0, 'award').item = 2), '9 result.json picks[0].award'],
    [base, 'another leaf', (r) => void (inside(r, 'picks', 1).leaf = 99), '9 result.json picks[1].leaf'],
    [base, 'another pick', (r) => void (inside(r, 'picks', 1).pick = 2), '9 result.json picks[1].pick'],
    [base, 'other tickets in', (r) => void (inside(r, 'picks', 1).remaining = 1), '9 result.json picks[1].remaining'],
    [base, 'other tickets', (r) => void (inside(r, 'picks', 1).tickets = 999), '9 result.json picks[1].tickets'],
    [base, 'a pick too few', (r) => void (r.picks as Json[]).pop(), '9 result.json picks[4]'],
    [
      base,
      'a pick too many',
      (r) => void (r.picks as Json[]).push((r.picks as Json[])[0] ?? null),
      '9 result.json picks[5]',
    ],
    [
      base,
      'another commitment',
      (r) => void (inside(r, 'picks', 2).identityCommit = '0'.repeat(64)),
      '10 result.json picks[2]',
    ],
    [base, 'another transcript', (r) => void (r.transcript = '0'.repeat(64)), '11 result.json transcript'],
  ]
  it.each(named(rows))('$what', async ({ wish, change, where }) => {
    expect(await step(makeArchive({ ...wish, change: { result: change } }).zip)).toBe(where)
  })

  it('a round more than was needed, where the rounds before it suffice to the last bit', async () => {
    const wish = (index: number): Wanted => ({ ...tossed, seed: `to the last bit ${index}`, roundLength: 8 })
    const spare = (made: Made): number => {
      const { reveal } = JSON.parse(String(made.files.get('result.json'))) as { reveal: { tosses: string[] } }
      return (
        reveal.tosses.map(peres).join('').length -
        made.picks.flatMap(({ coins }) => coins.map((c) => c[2])).join('').length
      )
    }
    let index = 0
    while (spare(makeArchive(wish(index))) !== 0) index += 1
    expect(await step(makeArchive(wish(index)).zip)).toBe('holds')
    expect(await step(makeArchive({ ...wish(index), roundsTooMany: 1 }).zip)).toBe('8 result.json reveal.tosses')
  })

  it.each([tossesOnly, tossed])('a round more than was needed: $seed', async (wish) => {
    expect(await step(makeArchive({ ...wish, roundsTooMany: 1 }).zip)).toBe('8 result.json reveal.tosses')
  })
})

const ROUND_1 = '8bca983b3d15cef4e4669ce60a50e4b724e45642c569e99016f8741538225b85bb90d88b6f615206fe895cb75ffbedcd'
const rounds = (result: Changeable): Json[] => inside(result, 'reveal').tosses as Json[]
const flipAll = (round: string): string => [...round].map((toss) => (toss === 'H' ? 'T' : 'H')).join('')
function swapToss(result: Changeable, change: (round: string) => string): void {
  rounds(result)[0] = change(String(rounds(result)[0]))
}

describe('a member that says otherwise fails, its digest notwithstanding:', () => {
  const text = (files: Map<string, Buffer>, name: string): string => String(files.get(name))
  const rewrite = (name: string, change: (text: string) => string) => (files: Map<string, Buffer>) => {
    files.set(name, utf8(change(text(files, name))))
  }
  const rows: [string, (files: Map<string, Buffer>) => void, string][] = [
    ['a missing member', (f) => void f.delete('CHECKING.txt'), '1 the member CHECKING.txt'],
    [
      'another header',
      rewrite('entries.csv', (t) => t.replace('entry_commit', 'entry_commits')),
      '4 entries.csv line 1',
    ],
    ['carriage returns', rewrite('entries.csv', (t) => t.replaceAll('\n', '\r\n')), '4 entries.csv line 1'],
    ['a leading zero', rewrite('entries.csv', (t) => t.replace(/\n/, '\n0')), '4 entries.csv line 2'],
    ['no tickets', rewrite('entries.csv', (t) => t.replace(/\n\d+,/, '\n0,')), '4 entries.csv line 2'],
    ['2^32 tickets', rewrite('entries.csv', (t) => t.replace(/\n\d+,/, '\n4294967296,')), '4 entries.csv line 2'],
    [
      'a ticket more',
      rewrite('entries.csv', (t) => t.replace(/\n(\d+),/, (_, n) => `\n${Number(n) + 1},`)),
      '4 entries.csv',
    ],
    ['no last line feed', rewrite('entries.csv', (t) => t.slice(0, -1)), '4 entries.csv line 13'],
    ['a leaf too few', rewrite('entries.csv', (t) => t.replace(/.*\n$/, '')), '4 entries.csv'],
    ['a leaf too many', rewrite('entries.csv', (t) => `${t}1,${'0'.repeat(64)}\n`), '4 entries.csv line 14'],
    ['two leaves exchanged', rewrite('entries.csv', (t) => t.replace(/\n(.*)\n(.*)\n/, '\n$2\n$1\n')), '4 entries.csv'],
    ['a leaf twice', rewrite('entries.csv', (t) => t.replace(/\n(.*)\n(.*)\n/, '\n$1\n$1\n')), '4 entries.csv line 3'],
    [
      'another flip',
      rewrite('transcript.jsonl', (t) => t.replace(/"([01]*)([01])"/, (_, a, b) => `"${a}${1 - b}"`)),
      '9 transcript.jsonl line 1',
    ],
    [
      'a transcript with a space',
      rewrite('transcript.jsonl', (t) => t.replace(',', ', ')),
      '9 transcript.jsonl line 1',
    ],
    ['a transcript line too many', rewrite('transcript.jsonl', (t) => `${t}{}\n`), '9 transcript.jsonl line 6'],
    ['another label', rewrite('labels.jsonl', (t) => t.replace('stub', 'stab')), '10 labels.jsonl line 1'],
    [
      'labels out of order',
      rewrite('labels.jsonl', (t) => t.replace(/^(.*)\n(.*)\n/, '$2\n$1\n')),
      '10 labels.jsonl line 2',
    ],
    ['a label twice', rewrite('labels.jsonl', (t) => t.replace(/^(.*)\n/, '$1\n$1\n')), '10 labels.jsonl line 2'],
    [
      'a label of a leaf not picked',
      rewrite('labels.jsonl', (t) => t.replace(/"leaf":\d+/, '"leaf":77')),
      '10 labels.jsonl line 1',
    ],
    ['an empty labels line', rewrite('labels.jsonl', (t) => `\n${t}`), '10 labels.jsonl line 1'],
    ['other terms', rewrite('terms.txt', (t) => `${t}More.\n`), '3 terms.txt'],
    ['another seal', rewrite('seal.json', (t) => t.replace('Marrow', 'Barrow')), '2 seal.sig'],
    ['another result', rewrite('result.json', (t) => t.replace('19:41', '19:42')), '2 result.sig'],
    ['a signature of 63 bytes', (f) => void f.set('seal.sig', Buffer.alloc(63)), '2 seal.sig'],
    ['a key with text before it', rewrite('site-key.pem', (t) => `Key:\n${t}`), '2 site-key.pem'],
    [
      'another key',
      (f) => void f.set('site-key.pem', pem(unhex('3d4017c3e843895a92b70aa74d1b7ebc9c982ccf2ec4968cc0cd55f12af4660c'))),
      '2 seal.sig',
    ],
  ]
  it.each(rows)('%s', async (_, change, where) => {
    expect(await step(makeArchive({ ...base, change: { files: change } }).zip)).toBe(where)
  })
})
