import { createServer } from 'node:http'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { createBeaconReader } from '#server/adapters/beacon/beacon-reader.ts'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { type BeaconFake, startBeaconFake } from '#server/fakes/beacon/beacon-fake.ts'
import { listenOnLoopback } from '#server/fakes/loopback.ts'
import { DEVELOPMENT_CHAIN, QUICKNET, roundTime } from '#shared/protocol/networks.ts'

const clock = settableClock(new Date(0))
let relays: BeaconFake[]
beforeAll(async () => {
  relays = await Promise.all([1, 2, 3].map(() => startBeaconFake({ port: 0, now: clock.now })))
})
beforeEach(() => {
  clock.set(new Date(roundTime(DEVELOPMENT_CHAIN, 500) * 1000))
  for (const relay of relays) relay.behave({ mode: 'right' })
})
afterAll(() => Promise.all(relays.map((relay) => relay.close())))

const [first, second, third] = [0, 1, 2].map((index) => () => relays[index] as BeaconFake) as [
  () => BeaconFake,
  () => BeaconFake,
  () => BeaconFake,
]
// Times are wide apart, so that a busy machine does not change who answers first.
const reader = (timeoutMs = 10_000) =>
  createBeaconReader({ relays: relays.map((relay) => relay.url), timeoutMs, staggerMs: 20, clock })
const read = (round: number, timeoutMs?: number) => reader(timeoutMs).read(DEVELOPMENT_CHAIN, round)

describe('reading a round', () => {
  it('gives a round that verifies, with the relay it came from', async () => {
    const answer = await read(500)
    expect(answer).toMatchObject({ kind: 'round', wrong: [], round: { round: 500, relay: first().url } })
    if (answer.kind !== 'round') throw new Error('no round')
    expect(answer.round.signature).toMatch(/^[0-9a-f]{96}$/)
    expect(answer.round.randomness).toMatch(/^[0-9a-f]{64}$/)
  })

  it('passes over relays that lie, garble or are down, and tells of the false answers', async () => {
    first().behave({ mode: 'lie' })
    second().behave({ mode: 'garble' })
    third().behave({ mode: 'slow', milliseconds: 2000 })
    const answer = await read(500)
    expect(answer).toMatchObject({ kind: 'round', round: { relay: third().url } })
    expect(answer.wrong).toEqual([
      { relay: first().url, what: expect.stringContaining('signature does not belong'), at: clock.now() },
      { relay: second().url, what: 'Its answer is not a round.', at: clock.now() },
    ])
    first().behave({ mode: 'down' })
    expect(await read(500)).toMatchObject({ kind: 'round', round: { relay: third().url } })
  })

  it('does not wait for a slow relay when another is quick', async () => {
    first().behave({ mode: 'slow', milliseconds: 9000 })
    const start = performance.now()
    expect(await read(500)).toMatchObject({ kind: 'round', round: { relay: second().url } })
    expect(performance.now() - start).toBeLessThan(7000)
  })

  it('says "not yet" before the round, and while any relay says so', async () => {
    expect(await read(501)).toMatchObject({
      kind: 'not-yet',
      reasons: [{ why: 'not-yet' }, { why: 'not-yet' }, { why: 'not-yet' }],
    })
    first().behave({ mode: 'down' })
    second().behave({ mode: 'late', seconds: 30 })
    third().behave({ mode: 'lie' })
    expect(await read(500)).toMatchObject({ kind: 'not-yet', wrong: [{ relay: third().url }] })
  })

  it('says "unreachable" with a reason for each relay, and makes nothing up', async () => {
    first().behave({ mode: 'down' })
    second().behave({ mode: 'slow', milliseconds: 6000 })
    third().behave({ mode: 'lie' })
    const answer = await read(500, 2500)
    expect(answer).toMatchObject({ kind: 'unreachable' })
    expect(answer).not.toHaveProperty('round')
    if (answer.kind === 'round') throw new Error('a round')
    const why = new Map(answer.reasons.map((reason) => [reason.relay, [reason.why, reason.detail]]))
    expect(why.get(first().url)).toEqual(['unreachable', expect.stringContaining('cannot be reached')])
    expect(why.get(second().url)).toEqual(['unreachable', 'It did not answer within 2.5 s.'])
    expect(why.get(third().url)?.[0]).toBe('wrong')
    expect(await createBeaconReader({ relays: [] }).read(DEVELOPMENT_CHAIN, 500)).toEqual({
      kind: 'unreachable',
      reasons: [],
      wrong: [],
    })
  })

  it('holds a round against the key of the network that is asked for, not of the one that answers', async () => {
    const foreign = { ...DEVELOPMENT_CHAIN, publicKey: QUICKNET.publicKey }
    expect((await reader().read(foreign, 500)).kind).toBe('unreachable')
  })
})

describe('a relay of another kind', () => {
  const serve = async (status: number, body: string) => {
    const server = createServer((_req, res) => res.writeHead(status, { 'content-type': 'application/json' }).end(body))
    const listening = await listenOnLoopback(server, 0)
    const answer = await createBeaconReader({ relays: [listening.url], timeoutMs: 10_000 }).read(QUICKNET, 123)
    await listening.close()
    return answer
  }
  // Round 123 of drand quicknet (noislabs/drand-verify, src/verify.rs); its randomness is the hash of the signature.
  const signature = 'b75c69d0b72a5d906e854e808ba7e2accb1542ac355ae486d591aa9d43765482e26cd02df835d3546d23c4b13e0dfc92'
  const randomness = 'fb8f7bc29bf24db51871ec8c79f3a1e4bd0557bc0dfcee9ed1d924e69d1c60dc'

  it('is believed for a real round of drand quicknet, with or without the randomness', async () => {
    const round = { round: 123, signature, randomness }
    expect(await serve(200, JSON.stringify(round))).toMatchObject({ kind: 'round', round })
    expect(await serve(200, JSON.stringify({ round: 123, signature }))).toMatchObject({ kind: 'round', round })
  })

  it.each([
    ['another round number', 200, JSON.stringify({ round: 124, signature })],
    // Round 657413 (mcdcam/python-drand-verify, README): a true round, but not the one that was asked for.
    [
      'another, real round',
      200,
      JSON.stringify({
        round: 657413,
        signature: 'b713718a38ae728dfd477991af2822e08d2f305e47718cef9f7848ce4050e7be41076862b98fad56e91a6b85b89cd97b',
      }),
    ],
    ['a false randomness', 200, JSON.stringify({ round: 123, signature, randomness: 'deadbeef'.repeat(8) })],
    ['capital letters', 200, JSON.stringify({ round: 123, signature: signature.toUpperCase() })],
    ['a text', 200, 'round 123'],
    ['100 kB', 200, JSON.stringify({ round: 123, signature, more: 'x'.repeat(100_000) })],
  ])('is reported as wrong for %s', async (_what, status, body) => {
    expect(await serve(status, body)).toMatchObject({ kind: 'unreachable', reasons: [{ why: 'wrong' }], wrong: [{}] })
  })

  it.each([
    [404, 'not-yet'],
    [425, 'not-yet'],
    [500, 'unreachable'],
    [403, 'unreachable'],
  ])('that answers %i counts as %s', async (status, kind) => {
    expect(await serve(status, '{}')).toMatchObject({ kind, wrong: [] })
  })
})

describe('looking after relays', () => {
  it('gives the newest round of each and what is wrong with the others', async () => {
    second().behave({ mode: 'down' })
    third().behave({ mode: 'lie' })
    const health = await reader().check(DEVELOPMENT_CHAIN)
    expect(health.map(({ relay, ok, round }) => [relay, ok, round])).toEqual([
      [first().url, true, 500],
      [second().url, false, null],
      [third().url, false, null],
    ])
  })
})
