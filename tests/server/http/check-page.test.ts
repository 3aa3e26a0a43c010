import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import express from 'express'
import request from 'supertest'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { mountCheckPage } from '#server/http/files/check-page.ts'
import { mountStaticFiles } from '#server/http/files/static-files.ts'
import { errorHandler } from '#server/http/middleware/errors.ts'
import { securityHeaders } from '#server/http/middleware/security-headers.ts'
import { createProblemOf } from '#server/http/problem-of.ts'

const POLICY = "default-src 'none'; script-src 'sha256-abc' 'wasm-unsafe-eval'"
const PAGE = `<!doctype html><meta http-equiv="Content-Security-Policy" content="${POLICY}"><p>The check</p>`

let build: string
beforeEach(() => {
  build = mkdtempSync(join(tmpdir(), 'evenpenny-check-page-'))
  mkdirSync(join(build, 'client', 'assets'), { recursive: true })
  mkdirSync(join(build, 'check-page'))
})
afterEach(() => rmSync(build, { recursive: true, force: true }))

function site() {
  const app = express()
  app.set('etag', false)
  app.use(securityHeaders({ https: false }))
  mountStaticFiles(app, build)
  mountCheckPage(app, build)
  app.use(errorHandler(createProblemOf(() => {})))
  return app
}

describe('/check.html', () => {
  it('is sent with the policy of its own head and nothing wider, and may not be framed', async () => {
    writeFileSync(join(build, 'check-page', 'check.html'), PAGE)
    const app = site()
    const first = await request(app)
      .get('/check.html')
      .expect(200)
      .expect('Content-Type', /^text\/html/)
    expect(first.text).toBe(PAGE)
    expect(first.headers['content-security-policy']).toBe(`${POLICY}; frame-ancestors 'none'`)
    await request(app)
      .get('/check.html')
      .set('If-None-Match', first.headers.etag ?? '')
      .expect(304)
  })

  it('is not there before the build, and comes with it', async () => {
    const app = site()
    await request(app).get('/check.html').expect(404)
    writeFileSync(join(build, 'check-page', 'check.html'), PAGE)
    await request(app).get('/check.html').expect(200)
  })

  it('is not sent without a policy', async () => {
    writeFileSync(join(build, 'check-page', 'check.html'), '<!doctype html><p>The check</p>')
    await request(site()).get('/check.html').expect(500)
  })
})

describe('files of the build', () => {
  it('lets WebAssembly run in the worker that checks, and nowhere else', async () => {
    for (const name of ['check-worker-Ab_3-x.js', 'client-Ab_3-x.js', 'other-check-worker-1.js']) {
      writeFileSync(join(build, 'client', 'assets', name), '1')
    }
    const policyOf = async (name: string) =>
      (await request(site()).get(`/assets/${name}`).expect(200)).headers['content-security-policy'] ?? ''
    const worker = await policyOf('check-worker-Ab_3-x.js')
    expect(worker).toContain("default-src 'none'")
    expect(worker).toContain("script-src 'self' 'wasm-unsafe-eval'")
    expect(worker).not.toContain("'unsafe-eval'")
    expect(await policyOf('client-Ab_3-x.js')).not.toContain('wasm')
    expect(await policyOf('other-check-worker-1.js')).not.toContain('wasm')
  })
})
