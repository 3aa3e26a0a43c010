import type { IncomingMessage } from 'node:http'
import { createServer, get as httpGet, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { gunzipSync } from 'node:zlib'
import { afterEach, describe, expect, it } from 'vitest'
import { newNonce } from '#server/http/middleware/security-headers.ts'
import { KeptPage } from '#server/http/pages/kept-page.ts'
import { PageCache } from '#server/http/pages/page-cache.ts'

let server: Server | undefined
afterEach(() => new Promise((done) => (server ? server.close(done) : done(undefined))))

/** A server that answers from the cache alone, and says "miss" else. */
async function serving(cache: PageCache) {
  server = createServer((request, response) => {
    if (!cache.serve(request, response)) response.end('miss')
  })
  await new Promise<void>((done) => server?.listen(0, '127.0.0.1', done))
  const { port } = server.address() as AddressInfo
  return (path: string, headers: Record<string, string> = {}, method = 'GET') =>
    new Promise<{ response: IncomingMessage; body: Buffer }>((resolve, reject) => {
      httpGet({ port, path, headers, method, host: '127.0.0.1', agent: false }, (response) => {
        const chunks: Buffer[] = []
        response.on('data', (chunk: Buffer) => chunks.push(chunk))
        response.on('end', () => resolve({ response, body: Buffer.concat(chunks) }))
      }).on('error', reject)
    })
}

const pageOf = (words: string) => {
  const nonce = newNonce()
  return new KeptPage(200, [['X-Policy', nonce]], Buffer.from(`${words} ${nonce}`), nonce)
}

describe('PageCache', () => {
  it('serves a kept page for a second, then lets one request make it anew while others get the old one', async () => {
    let now = 0
    const cache = new PageCache({ sessionCookie: 'evenpenny', now: () => now })
    const ask = await serving(cache)
    await cache.fill('/draws/a', async () => pageOf('first'))
    now = 999
    expect((await ask('/draws/a')).body.toString()).toMatch(/^first /)
    now = 1500
    expect((await ask('/draws/a')).body.toString()).toBe('miss')
    expect((await ask('/draws/a')).body.toString()).toMatch(/^first /)
    await cache.fill('/draws/a', async () => pageOf('second'))
    expect((await ask('/draws/a')).body.toString()).toMatch(/^second /)
  })

  it('does not serve an old page for ever where making it anew keeps failing', async () => {
    let now = 0
    const cache = new PageCache({ sessionCookie: 'evenpenny', now: () => now })
    const ask = await serving(cache)
    await cache.fill('/', async () => pageOf('first'))
    now = 2000
    await ask('/')
    now = 5001
    expect((await ask('/')).body.toString()).toBe('miss')
  })

  it('gives every response a nonce of its own, in header and body alike', async () => {
    const cache = new PageCache({ sessionCookie: 'evenpenny' })
    const ask = await serving(cache)
    await cache.fill('/', async () => pageOf('x'))
    const seen = new Set<string>()
    for (let i = 0; i < 20; i++) {
      const { response, body } = await ask('/')
      const nonce = String(response.headers['x-policy'])
      expect(body.toString()).toBe(`x ${nonce}`)
      seen.add(nonce)
    }
    expect(seen.size).toBe(20)
  })

  it('passes by whoever has a session, and whoever writes', async () => {
    const cache = new PageCache({ sessionCookie: 'evenpenny' })
    const ask = await serving(cache)
    await cache.fill('/', async () => pageOf('x'))
    expect((await ask('/', { cookie: 'a=b; evenpenny=s%3Aabc' })).body.toString()).toBe('miss')
    expect((await ask('/', {}, 'POST')).body.toString()).toBe('miss')
    expect((await ask('/', { cookie: 'other=1' })).body.toString()).toMatch(/^x /)
  })

  it('answers HEAD with the length and no body, and gzip only to those who take it', async () => {
    const cache = new PageCache({ sessionCookie: 'evenpenny' })
    const ask = await serving(cache)
    await cache.fill('/', async () => pageOf('x'))
    const head = await ask('/', {}, 'HEAD')
    expect(head.body.length).toBe(0)
    expect(head.response.headers['content-length']).toBe('24')
    const packed = await ask('/', { 'accept-encoding': 'br, gzip;q=0.5' })
    expect(packed.response.headers['content-encoding']).toBe('gzip')
    expect(gunzipSync(packed.body).toString()).toMatch(/^x /)
    const refused = await ask('/', { 'accept-encoding': 'gzip;q=0, br' })
    expect(refused.response.headers['content-encoding']).toBeUndefined()
  })

  it('renders once for all who ask at the same time', async () => {
    const cache = new PageCache({ sessionCookie: 'evenpenny' })
    let renderings = 0
    const produce = async () => {
      renderings++
      await new Promise((done) => setTimeout(done, 20))
      return pageOf('x')
    }
    await Promise.all([cache.fill('/', produce), cache.fill('/', produce), cache.fill('/', produce)])
    expect(renderings).toBe(1)
  })

  it('does not keep a page whose rendering began before a write', async () => {
    const cache = new PageCache({ sessionCookie: 'evenpenny' })
    const ask = await serving(cache)
    let release = () => {}
    const rendering = cache.fill('/', async () => {
      await new Promise<void>((done) => (release = done))
      return pageOf('old')
    })
    cache.clear()
    release()
    await rendering
    expect((await ask('/')).body.toString()).toBe('miss')
  })

  it('lets go of the oldest pages when they weigh too much', async () => {
    const cache = new PageCache({ sessionCookie: 'evenpenny' })
    const ask = await serving(cache)
    const heavy = new KeptPage(200, [], Buffer.alloc(10 * 1024 * 1024, 'x'), newNonce())
    for (const path of ['/1', '/2', '/3', '/4']) await cache.fill(path, async () => heavy)
    expect((await ask('/1')).body.toString()).toBe('miss')
    expect((await ask('/4')).body.length).toBe(10 * 1024 * 1024)
  })
})
