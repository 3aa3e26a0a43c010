import { hash } from 'node:crypto'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { type BeaconFake, startBeaconFake } from '#server/fakes/beacon/beacon-fake.ts'
import { verifyBeaconRound } from '#shared/protocol/beacon.ts'
import { DEVELOPMENT_CHAIN, roundTime } from '#shared/protocol/networks.ts'

const { chain, publicKey, genesisTime } = DEVELOPMENT_CHAIN
const sha256 = (data: Uint8Array) => hash('sha256', data, 'buffer')
const atRound = (round: number, seconds = 0) => new Date((roundTime(DEVELOPMENT_CHAIN, round) + seconds) * 1000)

let now = atRound(1000)
let fake: BeaconFake
beforeAll(async () => {
  fake = await startBeaconFake({ port: 0, now: () => now })
})
beforeEach(() => {
  now = atRound(1000)
  fake.behave({ mode: 'right' })
})
afterAll(() => fake.close())

async function get(path: string) {
  const response = await fetch(`${fake.url}${path}`)
  return { status: response.status, cache: response.headers.get('cache-control'), body: await response.json() }
}

const verifies = (round: number, signature: string) => verifyBeaconRound(sha256, { publicKey, round, signature }).ok

describe('the beacon fake', () => {
  it('describes its chain as drand does', async () => {
    expect((await get(`/${chain}/info`)).body).toMatchObject({
      public_key: publicKey,
      period: 3,
      genesis_time: genesisTime,
      hash: chain,
      schemeID: 'bls-unchained-g1-rfc9380',
    })
    expect((await get('/chains')).body).toEqual([chain])
    expect((await get(`/${'0'.repeat(64)}/info`)).status).toBe(404)
  })

  it('signs real rounds, the newest at its very second', async () => {
    const { status, body, cache } = await get(`/${chain}/public/1000`)
    expect(status).toBe(200)
    expect(cache).toBe('public, max-age=604800, immutable')
    expect(verifies(1000, body.signature)).toBe(true)
    expect(verifies(999, body.signature)).toBe(false)
    expect(body.randomness).toBe(sha256(Buffer.from(body.signature, 'hex')).toString('hex'))
    expect((await get(`/${chain}/public/latest`)).body).toEqual(body)
    now = atRound(1000, -0.001)
    expect((await get(`/${chain}/public/latest`)).body.round).toBe(999)
  })

  it('has no round before its time, and says how long to wait', async () => {
    const answer = await get(`/${chain}/public/1005`)
    expect([answer.status, answer.cache]).toEqual([404, 'public, must-revalidate, max-age=15'])
    now = atRound(1005)
    expect((await get(`/${chain}/public/1005`)).status).toBe(200)
    expect((await get(`/${chain}/public/0`)).status).toBe(404)
  })

  it('misbehaves as told', async () => {
    fake.behave({ mode: 'late', seconds: 6 })
    expect((await get(`/${chain}/public/999`)).status).toBe(404)
    expect((await get(`/${chain}/public/998`)).status).toBe(200)
    fake.behave({ mode: 'lie' })
    const { body } = await get(`/${chain}/public/1000`)
    expect([body.round, verifies(1000, body.signature), verifies(999, body.signature)]).toEqual([1000, false, true])
    fake.behave({ mode: 'down' })
    await expect(get(`/${chain}/public/1000`)).rejects.toThrow('fetch failed')
  })

  it('takes orders over HTTP only where it was opened for that', async () => {
    const order = (url: string) => fetch(`${url}/control`, { method: 'POST', body: JSON.stringify({ mode: 'garble' }) })
    expect((await order(fake.url)).status).toBe(405)
    const open = await startBeaconFake({ port: 0, now: () => now, control: true })
    expect((await order(open.url)).status).toBe(200)
    expect((await (await fetch(`${open.url}/${chain}/public/1`)).json()).signature).toBe('none')
    await open.close()
  })
})
