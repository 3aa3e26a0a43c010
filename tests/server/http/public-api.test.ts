import { createHash, createPublicKey, verify } from 'node:crypto'
import { eq } from 'drizzle-orm'
import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { draw } from '#server/store/schema/draw.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { checkReceipt, parseReceipt } from '#shared/protocol/receipt.ts'
import { parseSeal } from '#shared/protocol/seal.ts'
import { makeClosed, makeDraft, makeOffice, makeSealed } from '#tests/support/draws.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'

const clock = settableClock(new Date('2026-03-02T10:00:00Z'))
let site: WebSite
let drawn: string
let sealed: string
let closed: string
let draft: string

beforeAll(async () => {
  site = await startWebSite({}, {}, clock)
  const { services } = site
  const office = await makeOffice(services, { demo: true })
  const slugOf = async (id: string) =>
    (await services.db.select({ slug: draw.slug }).from(draw).where(eq(draw.id, id)))[0]?.slug as string
  const id = await makeSealed(services, office, { drawAtDate: new Date('2026-03-02T12:00:00Z') })
  clock.set(new Date('2026-03-02T12:00:01Z'))
  expect(await settleDraw(services, goOn, { draw: id })).toEqual({ kind: 'drawn' })
  drawn = await slugOf(id)
  const later = { drawAtDate: new Date('2026-03-05T12:00:00Z') }
  sealed = await slugOf(await makeSealed(services, office, { ...later, title: 'Summer hamper draw' }))
  closed = await slugOf(await makeClosed(services, office, later))
  draft = await slugOf(await makeDraft(services, office, later))
}, 60_000)
afterAll(() => site.close())

const get = (path: string) => request(site.listener).get(path)
const text = async (path: string) =>
  ((await get(path).responseType('blob').expect(200)).body as Buffer).toString('utf8')

describe('draws', () => {
  it('are listed from their opening on, found by their words and told apart by state', async () => {
    const all = await get('/api/v1/draws').expect(200)
    const slugs = (all.body.items as { slug: string }[]).map(({ slug }) => slug)
    expect(slugs.sort()).toEqual([closed, drawn, sealed].sort())
    const found = await get('/api/v1/draws?q=summer').expect(200)
    expect(found.body).toMatchObject({
      total: 1,
      page: 1,
      items: [{ slug: sealed, page: `${site.origin}/draws/${sealed}` }],
    })
    expect((await get('/api/v1/draws?state=drawn')).body.items).toMatchObject([
      { slug: drawn, tickets: 11, entrants: 4 },
    ])
    expect((await get('/api/v1/draws?state=draft')).status).toBe(400)
    expect((await get('/api/v1/draws?page=0')).body).toMatchObject({ status: 400, errors: [{ field: 'page' }] })
    await get(`/api/v1/draws/${draft}`).expect(404)
  })

  it('keep the size of the list to themselves until the seal', async () => {
    expect((await get(`/api/v1/draws/${closed}`)).body).toMatchObject({
      entrants: null,
      tickets: null,
      seal: null,
      files: [],
    })
    await get(`/api/v1/draws/${closed}/seal`).expect(404)
    const { body } = await get(`/api/v1/draws/${sealed}`).expect(200)
    expect(body).toMatchObject({ state: 'sealed', entrants: 4, tickets: 11, prizes: 2, result: null })
    await get(`/api/v1/draws/${sealed}/result`).expect(404)
    await get(`/api/v1/draws/${sealed}/transcript`).expect(404)
    for (const file of body.files as string[]) await get(file.replace(site.origin, '')).expect(200)
  })
})

describe('seals', () => {
  it('come with the bytes that were signed, under their draw and under their digest', async () => {
    const { body } = await get(`/api/v1/draws/${sealed}/seal`).expect(200)
    expect(createHash('sha256').update(body.signed).digest('hex')).toBe(body.digest)
    const key = createPublicKey(site.services.signing.current.publicKeyPem)
    expect(verify(null, Buffer.from(body.signed), key, Buffer.from(body.signature, 'hex'))).toBe(true)
    expect(body.signed).toBe(await text(`/draws/${sealed}/seal.json`))
    expect(body.root).toBe(JSON.parse(body.signed).entries.root)
    expect((await get(`/api/v1/seals/${body.digest}`)).body).toEqual(body)
    await get(`/api/v1/seals/${'0'.repeat(64)}`).expect(404)
    await get('/api/v1/seals/not-a-digest').expect(404)
  })

  it('prove each of their leaves with the short proof of the record, and name nobody', async () => {
    const { body: seal } = await get(`/api/v1/draws/${sealed}/seal`)
    const parsed = unwrap(parseSeal(Buffer.from(seal.signed), { allowDevelopmentChain: true }))
    const entries = (await text(`/draws/${sealed}/entries.csv`)).trim().split('\n').slice(1)
    for (let leaf = 0; leaf < 4; leaf += 1) {
      const bytes = Buffer.from(await text(`/api/v1/seals/${seal.digest}/leaves/${leaf}`))
      const proof = unwrap(parseReceipt(bytes))
      expect(proof).toMatchObject({ kind: 'inclusion', leaf })
      expect(checkReceipt(sha256, proof, parsed, seal.digest)).toEqual({ ok: true, value: true })
      expect(`${proof.tickets},${proof.kind === 'inclusion' ? proof.entryCommit : ''}`).toBe(entries[leaf])
      expect(bytes.toString()).not.toMatch(/Ada|Bram|Cleo|Dov|example/)
    }
    await get(`/api/v1/seals/${seal.digest}/leaves/4`).expect(404)
    await get(`/api/v1/seals/${seal.digest}/leaves/-1`).expect(404)
    await get(`/api/v1/seals/${seal.digest}/leaves/1.5`).expect(404)
  })
})

describe('results', () => {
  it('say what the signed result and the transcript say', async () => {
    const { body } = await get(`/api/v1/draws/${drawn}/result`).expect(200)
    const signed = await text(`/draws/${drawn}/result.json`)
    expect(createHash('sha256').update(signed).digest('hex')).toBe(body.digest)
    const key = createPublicKey(site.services.signing.current.publicKeyPem)
    expect(verify(null, Buffer.from(signed), key, Buffer.from(body.signature, 'hex'))).toBe(true)
    const lines = (await text(`/draws/${drawn}/transcript.jsonl`))
      .trim()
      .split('\n')
      .map((line) => JSON.parse(line))
    expect(body.picks).toMatchObject({ total: 3, page: 1, pageSize: 100 })
    expect(body.picks.items.map((pick: { leaf: number }) => pick.leaf)).toEqual(lines.map(({ leaf }) => leaf))
    expect(body.picks.items.map((pick: { labelState: string }) => pick.labelState)).toEqual([
      'open',
      'open',
      'not-called',
    ])
    expect(body.picks.items[2].label).toBeNull()
    const { body: transcript } = await get(`/api/v1/draws/${drawn}/transcript`).expect(200)
    expect(
      transcript.items.map(
        ({ pick, leaf, coins }: { pick: number; leaf: number; coins: Record<string, unknown>[] }) => ({
          coins: coins.map(({ left, right, flips, side }) => [left, right, flips, side]),
          leaf,
          pick,
        }),
      ),
    ).toEqual(lines)
    await get(`/api/v1/draws/${drawn}/transcript?page=2`).expect(404)
    expect((await get(`/api/v1/draws/${drawn}/result?page=2`)).body.picks.items).toEqual([])
  })

  it('show a label no longer once it is taken down, whatever a reader kept', async () => {
    const first = await get(`/api/v1/draws/${drawn}/result`)
    expect(first.headers['cache-control']).toBe('public, no-cache')
    await get(`/api/v1/draws/${drawn}/result`).set('If-None-Match', String(first.headers.etag)).expect(304)
    await site.database.pool.query('delete from opened_label where first_pick = 0')
    const again = await get(`/api/v1/draws/${drawn}/result`)
      .set('If-None-Match', String(first.headers.etag))
      .expect(200)
    expect(again.body.picks.items[0]).toMatchObject({ label: null, labelState: 'withheld' })
  })
})

describe('answers', () => {
  it('are kept for good where they never change, and only there', async () => {
    const { body: seal } = await get(`/api/v1/draws/${drawn}/seal`)
    const caching = async (path: string) => (await get(path).expect(200)).headers['cache-control']
    const forever = 'public, max-age=31536000, immutable'
    expect(await caching(`/api/v1/seals/${seal.digest}`)).toBe(forever)
    expect(await caching(`/api/v1/seals/${seal.digest}/leaves/0`)).toBe(forever)
    expect(await caching(`/api/v1/draws/${drawn}/transcript`)).toBe(forever)
    for (const path of ['', `/${drawn}`, `/${drawn}/seal`]) {
      expect(await caching(`/api/v1/draws${path}`)).toBe('public, no-cache')
    }
    // A 404 of today may be found tomorrow.
    expect((await get(`/api/v1/draws/${sealed}/transcript`)).headers['cache-control']).toBe('no-store')
  })

  it('are open to every origin, without cookies, also for the question that browsers ask first', async () => {
    const person = await site.person()
    const agent = await site.client(person.email)
    for (const path of [`/api/v1/draws/${drawn}`, `/draws/${drawn}/seal.json`, '/api/v1/draws/none-such']) {
      const answer = await agent.get(path).set('Origin', 'https://other.example')
      expect(answer.headers['access-control-allow-origin']).toBe('*')
      expect(answer.headers['access-control-allow-credentials']).toBeUndefined()
      expect(answer.headers['set-cookie']).toBeUndefined()
      const asked = await request(site.listener)
        .options(path)
        .set('Origin', 'https://other.example')
        .set('Access-Control-Request-Method', 'GET')
        .set('Access-Control-Request-Headers', 'if-none-match')
      expect(asked.status).toBe(204)
      expect(asked.headers).toMatchObject({
        'access-control-allow-origin': '*',
        'access-control-allow-methods': 'GET, HEAD',
      })
      expect(asked.headers['access-control-allow-headers']).toContain('If-None-Match')
    }
    for (const path of ['/api/session', '/api/draws', `/draws/${drawn}`, '/account']) {
      const answer = await agent.get(path).set('Origin', 'https://other.example')
      expect(answer.headers['access-control-allow-origin']).toBeUndefined()
    }
  })

  it('only ever read', async () => {
    const answer = await request(site.listener).post('/api/v1/draws').send({})
    expect(answer.status).toBe(405)
    expect(answer.headers.allow).toBe('GET, HEAD, OPTIONS')
    expect(answer.type).toBe('application/problem+json')
    const head = await request(site.listener).head(`/api/v1/draws/${drawn}`).expect(200)
    expect(head.headers.etag).toMatch(/^W\/"[\w-]{32}"$/)
  })

  it('are described at one address, which names this site', async () => {
    const { body, headers } = await get('/api/v1/openapi.json').expect(200)
    expect(headers['content-type']).toBe('application/json; charset=utf-8')
    expect(body.servers).toEqual([{ url: site.origin }])
    expect(Object.keys(body.paths)).toContain('/api/v1/seals/{seal}/leaves/{leaf}')
  })
})
