import { describe, expect, test } from 'vitest'
import { aSeal, aTossPlan, digestOf } from '#tests/support/record/seal.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { parseTime } from '#shared/bytes/time.ts'
import { beaconFor, DEVELOPMENT_CHAIN, firstRoundFrom, QUICKNET } from '#shared/protocol/networks.ts'
import { parseSeal, sealBytes, validateSeal } from '#shared/protocol/seal.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'

const code = (value: unknown, allowDevelopmentChain = false): string => {
  const result = validateSeal(value, { allowDevelopmentChain })
  return result.ok ? 'ok' : `${result.error.code} ${result.error.at}`.trim()
}
const beacon = aSeal().sources.beacon as NonNullable<Seal['sources']['beacon']>
const sources = (changes: object) => ({ sources: { ...aSeal().sources, ...changes } })
const tossed = { beacon: null, flips: 'tossed', seedCommit: null, tosses: aTossPlan } as const

describe('a seal', () => {
  test('is read back from its bytes as it was written', () => {
    const parsed = parseSeal(sealBytes(aSeal()))
    expect(parsed).toEqual({ ok: true, value: aSeal() })
  })

  test.each([
    ['plain', {}],
    ['tossed', { sources: tossed }],
    ['tossed with one bit at least', { sources: { ...tossed, tosses: { ...aTossPlan, minimumBits: 1 } } }],
    ['all three sources', sources({ tosses: { ...aTossPlan, minimumBits: 1 } })],
    ['tosses and seed without beacon', sources({ beacon: null, tosses: aTossPlan })],
    ['exactly 120 seconds before the draw', { sealedAt: '2030-06-15T19:28:00Z' }],
    ['revealed exactly 24 hours later', { revealBy: '2030-06-16T19:30:00Z' }],
    ['revealed at once', { revealBy: '2030-06-15T19:30:00Z' }],
    ['a replacement', { supersedes: digestOf(9), reason: 'Two stubs were entered twice.' }],
    ['no registration', { organisation: { name: 'Larkwater Choir', registration: null } }],
    ['100,000 picks', { prizes: [{ id: 'a', name: 'A', quantity: 99_999 }], reserves: 1 }],
    [
      'all the tickets there can be',
      { entries: { count: 2_000_000, root: digestOf(1), tickets: 2_000_000 * (2 ** 32 - 1) } },
    ],
  ])('%s is accepted', (_, changes) => {
    expect(code(aSeal(changes as Partial<Seal>))).toBe('ok')
  })

  test.each([
    [{ format: 'evenpenny/2' }, 'value-wrong format'],
    [{ kind: 'result' }, 'value-wrong kind'],
    [{ draw: '' }, 'text-wrong draw'],
    [{ title: 'a\u202eb' }, 'text-wrong title'],
    [{ title: 'a\nb' }, 'text-wrong title'],
    [{ title: 7 }, 'text-wrong title'],
    [{ key: 'A'.repeat(64) }, 'hex-wrong key'],
    [{ key: '1'.repeat(63) }, 'hex-wrong key'],
    [{ terms: null }, 'hex-wrong terms'],
    [{ sealedAt: '2030-06-15 18:00:00Z' }, 'time-wrong sealedAt'],
    [{ sealedAt: '2030-06-15T19:28:01Z' }, 'draw-too-soon drawAt'],
    [{ sealedAt: '2031-06-15T19:28:01Z' }, 'draw-too-soon drawAt'],
    [{ revealBy: '2030-06-16T19:30:01Z' }, 'reveal-time revealBy'],
    [{ revealBy: '2030-06-15T19:29:59Z' }, 'reveal-time revealBy'],
    [{ revealBy: '2030-06-15T20:00:00Z', sources: tossed }, 'reveal-time revealBy'],
    [{ entries: { count: 0, root: digestOf(1), tickets: 1 } }, 'number-wrong entries.count'],
    [{ entries: { count: 2_000_001, root: digestOf(1), tickets: 3_000_000 } }, 'number-wrong entries.count'],
    [{ entries: { count: true, root: digestOf(1), tickets: 1 } }, 'number-wrong entries.count'],
    [{ entries: { count: '1', root: digestOf(1), tickets: 1 } }, 'number-wrong entries.count'],
    [{ entries: { count: 1, root: digestOf(1), tickets: 2 ** 53 } }, 'number-wrong entries.tickets'],
    [{ entries: { count: 2, root: digestOf(1), tickets: 1 } }, 'ticket-total entries.tickets'],
    [{ entries: { count: 1, root: digestOf(1), tickets: 2 ** 32 } }, 'ticket-total entries.tickets'],
    [{ entries: { count: 1, root: digestOf(1), tickets: 1, total: 1 } }, 'member-unknown entries.total'],
    [{ entries: { count: 1, root: digestOf(1) } }, 'member-missing entries.tickets'],
    [{ entries: [] }, 'object-expected entries'],
    [{ prizes: [] }, 'prizes-missing prizes'],
    [{ prizes: {} }, 'list-expected prizes'],
    [{ prizes: [{ id: 'a', name: 'A', quantity: 0 }] }, 'number-wrong prizes[0].quantity'],
    [{ prizes: [{ id: 'a', name: 'A', quantity: 1.5 }] }, 'number-wrong prizes[0].quantity'],
    [
      {
        prizes: [
          { id: 'a', name: 'A', quantity: 1 },
          { id: 'a', name: 'B', quantity: 1 },
        ],
      },
      'prize-id-twice prizes[1].id',
    ],
    [{ prizes: [{ id: 'a', name: 'A', quantity: 100_000 }], reserves: 1 }, 'too-many-picks prizes'],
    [{ reserves: -1 }, 'number-wrong reserves'],
    [{ reserves: -0 }, 'number-wrong reserves'],
    [{ rule: 'every-entrant' }, 'value-wrong rule'],
    [sources({ seedCommit: null }), 'sources-wrong sources'],
    [sources({ beacon: null }), 'sources-wrong sources'],
    [sources({ flips: 'tossed' }), 'sources-wrong sources'],
    [{ sources: { ...tossed, seedCommit: digestOf(1) } }, 'sources-wrong sources'],
    [{ sources: { ...tossed, beacon } }, 'sources-wrong sources'],
    [{ sources: { ...tossed, tosses: null } }, 'sources-wrong sources'],
    [sources({ beacon: null, tosses: { ...aTossPlan, minimumBits: 63 } }), 'minimum-bits sources.tosses.minimumBits'],
    [sources({ tosses: { ...aTossPlan, minimumBits: 0 } }), 'number-wrong sources.tosses.minimumBits'],
    [sources({ tosses: { ...aTossPlan, roundLength: 7 } }), 'number-wrong sources.tosses.roundLength'],
    [sources({ tosses: { ...aTossPlan, roundLength: 257 } }), 'number-wrong sources.tosses.roundLength'],
    [sources({ tosses: { ...aTossPlan, witnesses: [] } }), 'witness-missing sources.tosses.witnesses'],
    [sources({ tosses: { ...aTossPlan, witnesses: [''] } }), 'text-wrong sources.tosses.witnesses[0]'],
    [sources({ beacon: { ...beacon, round: beacon.round + 1 } }), 'beacon-round sources.beacon.round'],
    [sources({ beacon: { ...beacon, round: beacon.round - 1 } }), 'beacon-round sources.beacon.round'],
    [sources({ beacon: { ...beacon, period: 30 } }), 'network-unknown sources.beacon'],
    [sources({ beacon: { ...beacon, genesisTime: beacon.genesisTime + 3 } }), 'network-unknown sources.beacon'],
    [sources({ beacon: { ...beacon, chain: digestOf(1) } }), 'network-unknown sources.beacon'],
    [sources({ beacon: { ...beacon, scheme: 'bls-unchained-on-g1' } }), 'network-unknown sources.beacon'],
    [sources({ beacon: { ...beacon, publicKey: DEVELOPMENT_CHAIN.publicKey } }), 'network-unknown sources.beacon'],
    [{ supersedes: digestOf(1) }, 'supersedes-without-reason reason'],
    [{ reason: 'Why.' }, 'supersedes-without-reason reason'],
  ])('%j is refused: %s', (changes, expected) => {
    expect(code({ ...aSeal(), ...changes })).toBe(expected)
  })

  test('a member missing, unknown or doubled is refused', () => {
    for (const name of Object.keys(aSeal())) {
      const { [name as 'draw']: _, ...without } = aSeal()
      expect(code(without)).toBe(`member-missing ${name}`)
    }
    expect(code({ ...aSeal(), note: null })).toBe('member-unknown note')
    const text = new TextDecoder().decode(sealBytes(aSeal()))
    const doubled = text.replace('"draw":', '"draw":"spring-hamper","draw":')
    expect(parseSeal(utf8(doubled))).toMatchObject({ error: { code: 'duplicate-member' } })
    expect(parseSeal(utf8(`${text}\n`))).toMatchObject({ error: { code: 'not-canonical' } })
  })

  test('the development chain passes only under its flag', () => {
    const at = parseTime(aSeal().drawAt) as number
    const seal = aSeal(sources({ beacon: beaconFor(DEVELOPMENT_CHAIN, at) }))
    expect(code(seal)).toBe('development-chain sources.beacon')
    expect(code(seal, true)).toBe('ok')
  })

  test.each([[null], [[]], ['seal'], [7], [undefined]])('%j is no seal', (value) => {
    expect(code(value)).toBe('object-expected')
  })
})

test('the round of a draw is the first at or after its time, 1 at least', () => {
  const { genesisTime } = QUICKNET
  expect(firstRoundFrom(QUICKNET, 0)).toBe(1)
  expect(firstRoundFrom(QUICKNET, genesisTime)).toBe(1)
  expect(firstRoundFrom(QUICKNET, genesisTime + 1)).toBe(2)
  expect(firstRoundFrom(QUICKNET, genesisTime + 3)).toBe(2)
  expect(firstRoundFrom(QUICKNET, genesisTime + 4)).toBe(3)
})
