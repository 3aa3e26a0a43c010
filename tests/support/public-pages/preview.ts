/**
 * Shows the built pages with invented data, without a database: `node --import tsx tests/support/public-pages/preview.ts [port] [build folder]`.
 * Run `npm run build` first. For looking at the pages; the tests do not use it.
 */
import { existsSync, readFileSync } from 'node:fs'
import { extname, join } from 'node:path'
import express from 'express'
import { securityHeaders, nonceOf } from '#server/http/middleware/security-headers.ts'
import { loadRenderer } from '#server/http/pages/renderer.ts'
import { allEndpoints } from '#shared/schemas/api/all.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { fixtureClient } from './fixture-client.ts'

const port = Number(process.argv[2] ?? 4173)
const build = process.argv[3] ?? join(import.meta.dirname, '..', '..', '..', 'build')
const renderer = await loadRenderer(build)
const api = fixtureClient()
const app = express()

app.use(securityHeaders({ https: false }))
app.use(express.static(join(build, 'client'), { index: false }))
app.get('/api/{*path}', async (request, response) => {
  const endpoint = allEndpoints.find(
    (candidate) =>
      candidate.method === 'GET' && new RegExp(`^${candidate.path.replace(/:[a-z]+/gi, '[^/]+')}$`).test(request.path),
  )
  if (!endpoint) return void response.status(404).end()
  const names = [...endpoint.path.matchAll(/:([a-z]+)/gi)].map((match) => match[1] as string)
  const values = new RegExp(`^${endpoint.path.replace(/:[a-z]+/gi, '([^/]+)')}$`).exec(request.path)?.slice(1) ?? []
  const params = Object.fromEntries(names.map((name, index) => [name, values[index]]))
  try {
    response.json(await api.call(endpoint, { params, query: request.query } as never))
  } catch (error) {
    if (!(error instanceof Problem)) throw error
    response.status(error.details.status).json(error.details)
  }
})
app.get('/{*path}', async (request, response) => {
  const file = join(build, 'client', request.path)
  if (extname(request.path) && existsSync(file)) return void response.send(readFileSync(file))
  const page = await renderer.render(new Request(`http://127.0.0.1:${port}${request.url}`), {
    api,
    nonce: nonceOf(response),
    assets: renderer.assets,
    origin: `http://127.0.0.1:${port}`,
    now: '2026-06-17T17:04:00Z',
    onError: (error) => console.error(error),
  })
  if (page instanceof Response) return void response.redirect(page.status, page.headers.get('location') ?? '/')
  response.status(page.status).set(page.headers)
  page.pipe(response)
})
app.listen(port, '127.0.0.1', () => console.log(`http://127.0.0.1:${port}`))
