import { createHash } from 'node:crypto'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { settableClock, systemClock } from '#server/adapters/clock/clock.ts'
import { createDevelopmentTimestamper, createTimestamper } from '#server/adapters/timestamp/timestamper.ts'
import { startTimestampFake, type TimestampFake } from '#server/fakes/timestamp/timestamp-fake.ts'
import { certificatesOfPem } from '#shared/timestamp/certificate.ts'
import { DEVELOPMENT_AUTHORITY, DEVELOPMENT_AUTHORITY_PEM } from '#shared/timestamp/development-authority.ts'
import { timestampRequest } from '#shared/timestamp/request.ts'
import { makeOpensslAuthority, opensslVerifies } from '#tests/support/timestamp/openssl-authority.ts'

const DATA = new TextEncoder().encode('a seal')
const IMPRINT = new Uint8Array(createHash('sha256').update(DATA).digest())

let fake: TimestampFake
let spare: TimestampFake
beforeAll(async () => {
  fake = await startTimestampFake({ port: 0 })
  spare = await startTimestampFake({ port: 0 })
})
afterAll(async () => {
  await fake.close()
  await spare.close()
})
beforeEach(() => fake.behave({ mode: 'right' }))

const asking = (options: Partial<Parameters<typeof createTimestamper>[0]> = {}) =>
  createTimestamper({ urls: [fake.url], trusted: [DEVELOPMENT_AUTHORITY], clock: systemClock, ...options })

describe('the local timestamp authority', () => {
  it('gives tokens that OpenSSL verifies, with the time of now', async () => {
    const answer = await asking().stamp(IMPRINT)
    if (answer.kind !== 'stamped') throw new Error('no timestamp')
    expect(opensslVerifies(DATA, answer.stamp.response, DEVELOPMENT_AUTHORITY_PEM)).toBe(true)
    expect(opensslVerifies(new TextEncoder().encode('a Seal'), answer.stamp.response, DEVELOPMENT_AUTHORITY_PEM)).toBe(
      false,
    )
    expect(Math.abs(answer.stamp.genTime.getTime() - Date.now())).toBeLessThan(3000)
    expect(answer.stamp.latest.getTime()).toBe(answer.stamp.genTime.getTime() + 1000)
  })
  it('speaks HTTP as RFC 3161 section 3.4 says', async () => {
    const body = timestampRequest({ imprint: IMPRINT, nonce: null, certificates: false })
    const post = (type: string, bytes: Uint8Array) =>
      fetch(fake.url, { method: 'POST', headers: { 'content-type': type }, body: new Uint8Array(bytes) })
    const right = await post('application/timestamp-query', body)
    expect([right.status, right.headers.get('content-type')]).toEqual([200, 'application/timestamp-reply'])
    expect((await post('text/plain', body)).status).toBe(415)
    expect((await fetch(fake.url)).status).toBe(405)
    expect((await post('application/timestamp-query', new Uint8Array(5000))).status).toBe(400)
  })
})

describe('asking for a timestamp', () => {
  it.each<[Parameters<TimestampFake['behave']>[0], RegExp]>([
    [{ mode: 'down' }, /cannot be reached/],
    [{ mode: 'slow', milliseconds: 2000 }, /did not answer within 0\.3 s/],
    [{ mode: 'lie' }, /timestamp of something else/],
    [{ mode: 'refuse' }, /This authority refuses today/],
    [{ mode: 'off', seconds: -400 }, /differ by (399|400|401) seconds/],
    [{ mode: 'off', seconds: 400 }, /differ by (399|400|401) seconds/],
  ])('gives none from one that behaves as %j, with the reason, and goes on to the next', async (behaviour, words) => {
    fake.behave(behaviour)
    const alone = await asking({ timeoutMs: 300 }).stamp(IMPRINT)
    expect(alone).toMatchObject({ kind: 'none', reasons: [{ url: fake.url, detail: expect.stringMatching(words) }] })
    const both = asking({ timeoutMs: 300, urls: [fake.url, spare.url] })
    expect(await both.stamp(IMPRINT)).toMatchObject({ kind: 'stamped' })
    expect(await both.check()).toMatchObject([{ ok: false }, { ok: true }])
  })
  it('takes none from an authority that nobody vouches for', async () => {
    const other = makeOpensslAuthority('p256')
    const trusted = certificatesOfPem(other.root)
    other.close()
    expect(await asking({ trusted }).stamp(IMPRINT)).toMatchObject({
      kind: 'none',
      reasons: [{ detail: expect.stringMatching(/No trusted certificate vouches/) }],
    })
  })
  it('does not ask a good authority again for its health at once', async () => {
    const timestamper = asking({ urls: [spare.url] })
    const before = spare.signed()
    await timestamper.check()
    await timestamper.check()
    expect(spare.signed()).toBe(before + 1)
  })
  it('signs days gone by for demo data', async () => {
    const clock = settableClock(new Date('2026-02-03T04:05:06Z'))
    const answer = await createDevelopmentTimestamper(clock).stamp(IMPRINT)
    if (answer.kind !== 'stamped') throw new Error('no timestamp')
    expect(answer.stamp.genTime).toEqual(clock.now())
    expect(opensslVerifies(DATA, answer.stamp.response, DEVELOPMENT_AUTHORITY_PEM)).toBe(true)
  })
})
