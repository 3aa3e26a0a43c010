import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { newToken, tokenHash } from '#server/store/tokens.ts'
import { startWebSite, PASSWORD, type WebSite } from '#tests/support/web-site.ts'

let site: WebSite
beforeAll(async () => {
  site = await startWebSite()
})
afterAll(() => site.close())

describe('writes from other sites', () => {
  const write = () => request(site.listener).post('/api/password-resets').send({ email: 'x@group.example' })

  it('are refused by what the browser says of their origin', async () => {
    for (const [name, value] of [
      ['Sec-Fetch-Site', 'cross-site'],
      ['Sec-Fetch-Site', 'same-site'],
      ['Origin', 'https://elsewhere.example'],
      ['Origin', 'null'],
    ] as const) {
      const answer = await write().set(name, value)
      expect(answer.status, `${name}: ${value}`).toBe(403)
      expect(answer.type).toBe('application/problem+json')
      expect(answer.body).toMatchObject({ type: '/problems/cross-site', status: 403 })
    }
    expect((await write().set('Sec-Fetch-Site', 'same-origin').set('Origin', 'https://elsewhere.example')).status).toBe(
      403,
    )
  })

  it('pass from the site itself, and from programs', async () => {
    expect((await write().set('Sec-Fetch-Site', 'same-origin').set('Origin', site.origin)).status).toBe(200)
    expect((await write()).status).toBe(200)
  })

  it('are refused for uploads too, before anything is read', async () => {
    const answer = await request(site.listener)
      .post('/api/office/draws/0b6d1f8a-3f5f-4c57-9e5b-2d0f6b1f9c77/imports')
      .set('Origin', 'https://elsewhere.example')
      .attach('file', Buffer.from('name,tickets\n'), 'a.csv')
    expect(answer.status).toBe(403)
  })

  it('leave reading alone', async () => {
    expect((await request(site.listener).get('/draws').set('Sec-Fetch-Site', 'cross-site')).status).toBe(200)
  })
})

describe('headers', () => {
  const nonceIn = (policy: string) => /'nonce-([\w-]{22})'/.exec(policy)?.[1]

  it('carry a policy whose nonce is that of the page and new for each answer', async () => {
    const seen = new Set<string>()
    for (const path of ['/how-it-works', '/how-it-works', '/sign-in', '/nothing']) {
      const answer = await request(site.listener).get(path)
      const policy = String(answer.headers['content-security-policy'])
      const nonce = nonceIn(policy)
      expect(answer.text).toContain(`<script nonce="${nonce}">`)
      seen.add(String(nonce))
      expect(policy.split(';').map((part) => part.trim().split(' ')[0])).toEqual([
        'default-src',
        'script-src',
        'style-src',
        'img-src',
        'font-src',
        'connect-src',
        'worker-src',
        'manifest-src',
        'object-src',
        'base-uri',
        'form-action',
        'frame-ancestors',
      ])
      expect(policy).not.toMatch(/unsafe|https?:|\*/)
      expect(answer.headers).toMatchObject({
        'x-content-type-options': 'nosniff',
        'x-frame-options': 'DENY',
        'referrer-policy': 'same-origin',
      })
      expect(answer.headers['x-powered-by']).toBeUndefined()
      expect(answer.headers['strict-transport-security']).toBeUndefined()
    }
    expect(seen.size).toBe(4)
  })

  it('keep private answers out of every cache', async () => {
    const person = await site.person()
    const client = await site.client(person.email)
    for (const path of ['/api/session', '/office', '/draws']) {
      expect((await client.get(path)).headers['cache-control'], path).toBe('no-store')
    }
    expect((await request(site.listener).get('/draws')).headers['cache-control']).toBe('private, no-cache')
  })

  it('demand TLS, and bind the cookie to the host, where the site is reached over TLS', async () => {
    const secure = await startWebSite({}, { origin: 'https://draws.site.example', trustedProxies: 1 })
    try {
      const page = await request(secure.listener).get('/draws')
      expect(page.headers['strict-transport-security']).toBe('max-age=63072000; includeSubDomains')
      expect(page.headers['content-security-policy']).toContain('upgrade-insecure-requests')
      const person = await secure.person()
      const answer = await request(secure.listener)
        .post('/api/session')
        .set('X-Forwarded-Proto', 'https')
        .send({ email: person.email, password: PASSWORD })
      expect(String(answer.headers['set-cookie'])).toMatch(
        /^__Host-evenpenny=.*; Path=\/; HttpOnly; Secure; SameSite=Lax$/,
      )
    } finally {
      await secure.close()
    }
  })
})

describe('problems', () => {
  const post = (body: string, type = 'application/json') =>
    request(site.listener).post('/api/session').set('Content-Type', type).send(body)

  it('have the form of RFC 9457', async () => {
    const answer = await post('{"email":""}')
    expect(answer.status).toBe(422)
    expect(answer.type).toBe('application/problem+json')
    expect(answer.body).toEqual({
      type: '/problems/invalid-fields',
      title: 'Some fields are not right',
      status: 422,
      detail: '2 fields need another look.',
      instance: '/api/session',
      errors: [
        { field: 'email', message: 'Type your e-mail address.' },
        { field: 'password', message: 'Fill this in.' },
      ],
    })
  })

  it('tell what is wrong with a body that cannot be read', async () => {
    expect((await post('{"email":')).body).toMatchObject({
      status: 400,
      detail: 'The body of this request is not JSON.',
    })
    expect((await post('email=x', 'application/x-www-form-urlencoded')).status).toBe(415)
    const long = await post(JSON.stringify({ email: 'x'.repeat(110_000) }))
    expect(long.status).toBe(413)
    expect(long.type).toBe('application/problem+json')
  })

  it('answer unknown and malformed addresses', async () => {
    expect((await request(site.listener).get('/api/nothing')).body).toMatchObject({
      status: 404,
      instance: '/api/nothing',
    })
    expect((await request(site.listener).put('/api/session').send({})).status).toBe(404)
    expect((await request(site.listener).get('/api/draws/%E0%A4%A').set('Accept', 'application/json')).status).toBe(400)
    expect((await request(site.listener).get('/api/draws?page=0')).body.errors).toEqual([
      { field: 'page', message: 'The lowest value is 1.' },
    ])
  })

  it('tell nothing of the inside when something breaks, and log it with the id that the answer bears', async () => {
    const broken = await startWebSite({
      renderer: {
        render: () => Promise.reject(new Error('secret detail')),
        assets: { scripts: [], styles: [], preload: [] },
      },
    })
    try {
      const answer = await request(broken.listener).get('/sign-in').set('Accept', 'text/html')
      expect(answer.status).toBe(500)
      expect(answer.type).toBe('text/html')
      expect(answer.text).not.toContain('secret detail')
      expect(answer.text).toContain(String(answer.headers['x-request-id']))
      expect(broken.log()).toContain('secret detail')
    } finally {
      await broken.close()
    }
  })
})

describe('the log', () => {
  it('holds no token, no cookie, no query and no address of a person', async () => {
    const token = newToken(site.services.entropy)
    const person = await site.person()
    const client = await site.client(person.email)
    await client.get(`/invitations/${token}?x=words-of-a-search`)
    await client.get(`/api/password-resets/${token}`)
    await client.get('/api/draws?q=words-of-a-search')
    const log = site.log()
    expect(log).toContain('/api/password-resets/…')
    expect(log).toContain('"status":410')
    for (const secret of [token, tokenHash(token), person.email, PASSWORD, 'words-of-a-search', 'evenpenny=']) {
      expect(log.includes(secret), secret).toBe(false)
    }
  })
})

describe('site files', () => {
  it('tell that the database answers, and which version this is', async () => {
    expect((await request(site.listener).get('/healthz')).body).toEqual({ status: 'ok', version: '0.0.0-test' })
  })

  it('keep private places out of search engines and list public draws', async () => {
    const robots = await request(site.listener).get('/robots.txt')
    expect(robots.text).toContain('Disallow: /office\n')
    expect(robots.text).toContain(`Sitemap: ${site.origin}/sitemap.xml`)
    const sitemap = await request(site.listener).get('/sitemap.xml')
    expect(sitemap.text).toContain(`<loc>${site.origin}/how-it-works</loc>`)
  })

  it('compress what compresses', async () => {
    const answer = await request(site.listener).get('/sitemap.xml').set('Accept-Encoding', 'gzip')
    expect(answer.headers.vary).toContain('Accept-Encoding')
  })
})
