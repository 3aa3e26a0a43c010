import { Writable } from 'node:stream'
import type { Express, Request, RequestHandler, Response as ExpressResponse } from 'express'
import { type Actor, NOBODY } from '#server/http/authorisation/actor.ts'
import { decide, type Rule } from '#server/http/authorisation/decide.ts'
import { pageRules } from '#server/http/authorisation/page-rules.ts'
import type { RequestContext } from '#server/http/endpoints/context.ts'
import type { ContextOf } from '#server/http/endpoints/mount.ts'
import type { Registry } from '#server/http/endpoints/registry.ts'
import { keepPrivate } from '#server/http/middleware/private-pages.ts'
import { newNonce, nonceOf } from '#server/http/middleware/security-headers.ts'
import { inProcessClient } from '#server/http/pages/in-process-client.ts'
import { KeptPage } from '#server/http/pages/kept-page.ts'
import { type PageCache, send } from '#server/http/pages/page-cache.ts'
import type { RenderContext, RenderedPage, Renderer } from '#server/http/pages/renderer.ts'
import type { ProblemOf } from '#server/http/problem-of.ts'
import { problem } from '#server/http/problems.ts'
import { getSession } from '#shared/schemas/api/session.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'

export interface PageParts {
  readonly renderer: Renderer
  readonly registry: Registry
  readonly contextOf: ContextOf
  readonly problemOf: ProblemOf
  readonly cache: PageCache
  readonly origin: string
  readonly now: () => string
  readonly onError: (error: unknown) => void
}

/** Public pages with nothing of the visitor's in them: these are kept for a second. */
const KEPT: ReadonlySet<string> = new Set([
  '/',
  '/draws',
  '/draws/:slug',
  '/draws/:slug/picks/:pick',
  '/organisations',
  '/organisations/:slug',
  '/how-it-works',
  '/developers',
  '/log',
])

/** Pages whose address is a secret, and the one that leads there. */
const SECRET: ReadonlySet<string> = new Set(['/entry', '/entry/:token'])
const openly: RequestHandler = (_request, _response, next) => next()

/** Puts every page onto the application, the page for unknown addresses last. */
export function mountPages(app: Express, parts: PageParts): void {
  for (const [path, rule] of Object.entries(pageRules)) {
    app.get(path, SECRET.has(path) ? keepPrivate : openly, async (request, response) => {
      if (KEPT.has(path) && parts.cache.concerns(request)) await sendKept(parts, request, response)
      else await sendOwn(parts, rule, request, response)
    })
  }
}

async function sendKept(parts: PageParts, request: Request, response: ExpressResponse): Promise<void> {
  const page = await parts.cache.fill(request.url, () => makeKept(parts, request, response))
  if (page) send(page, request, response)
  else await sendOwn(parts, pageRules['/'], request, response)
}

/** Renders the page as a stranger sees it, whoever asks; null for what is not worth keeping. */
async function makeKept(parts: PageParts, request: Request, response: ExpressResponse): Promise<KeptPage | null> {
  const nonce = newNonce()
  const stranger: RequestContext = { ...parts.contextOf(request), actor: NOBODY, session: NO_SESSION }
  const rendered = await parts.renderer.render(pageRequest(parts, request), {
    ...contextFor(parts, nonce),
    api: inProcessClient(parts.registry, stranger, parts.problemOf),
  })
  if (isRedirect(rendered) || rendered.status !== 200) return null
  const headers = Object.entries(response.getHeaders())
    .filter(([name]) => name !== 'x-request-id' && name !== 'set-cookie')
    .map(([name, value]) => [name, String(value).replaceAll(nonceOf(response), nonce)] as const)
  const own = Object.entries(rendered.headers).map(([name, value]) => [name.toLowerCase(), value] as const)
  const merged = new Map<string, string>([
    ...headers,
    ...own,
    ['vary', 'Accept-Encoding, Cookie'],
    // No cache between may hand one visitor's nonce to another.
    ['cache-control', 'private, no-cache'],
  ])
  return new KeptPage(rendered.status, [...merged], await collect(rendered), nonce)
}

async function sendOwn(parts: PageParts, rule: Rule, request: Request, response: ExpressResponse): Promise<void> {
  const context = parts.contextOf(request)
  const decision = decide(rule, context.actor, null)
  if (!decision.allowed && decision.status === 401) {
    response.setHeader('Cache-Control', 'no-store')
    response.redirect(303, `/sign-in?next=${encodeURIComponent(request.url)}`)
    return
  }
  const api = inProcessClient(parts.registry, context, parts.problemOf)
  const rendered = await parts.renderer.render(pageRequest(parts, request), {
    ...contextFor(parts, nonceOf(response)),
    api: decision.allowed ? api : refusing(api, decision.status, decision.reason),
  })
  if (isRedirect(rendered)) {
    response.setHeader('Cache-Control', 'no-store')
    rendered.headers.forEach((value, name) => response.setHeader(name, value))
    response.status(rendered.status).end()
    return
  }
  for (const [name, value] of Object.entries(rendered.headers)) response.setHeader(name, value)
  // A page whose address is a secret has said already that nobody keeps it.
  if (response.getHeader('Cache-Control') !== 'no-store') {
    response.setHeader('Cache-Control', isPrivate(rule, context.actor) ? 'no-store' : 'private, no-cache')
  }
  response.vary('Cookie')
  response.status(decision.allowed ? rendered.status : decision.status)
  if (request.method === 'HEAD') response.end()
  else rendered.pipe(response)
}

const isRedirect = (rendered: RenderedPage | Response): rendered is Response => rendered instanceof Response
const isPrivate = (rule: Rule, actor: Actor) => rule.permission !== 'visit' || actor.person !== null

/** Lets a refused page say who is signed in, and nothing else. */
function refusing(api: ApiClient, status: number, reason: string): ApiClient {
  return {
    call: (endpoint, input) =>
      endpoint.name === getSession.name ? api.call(endpoint, input) : Promise.reject(problem(status, reason)),
  }
}

function contextFor(parts: PageParts, nonce: string): Omit<RenderContext, 'api'> {
  const { renderer, origin, onError } = parts
  return { nonce, assets: renderer.assets, origin, now: parts.now(), onError }
}

/** The page's address as the Fetch standard writes requests. Pages are read only: there is no body. */
function pageRequest(parts: PageParts, request: Request): globalThis.Request {
  const url = new URL(`${parts.origin}${request.url.startsWith('/') ? request.url : '/'}`)
  return new globalThis.Request(url, { headers: { accept: 'text/html' } })
}

function collect(page: RenderedPage): Promise<Buffer> {
  return new Promise((resolve, reject) => {
    const chunks: Buffer[] = []
    const sink = new Writable({
      write(chunk: Buffer, _encoding, done) {
        chunks.push(Buffer.from(chunk))
        done()
      },
    })
    sink.on('finish', () => resolve(Buffer.concat(chunks)))
    sink.on('error', reject)
    page.pipe(sink)
  })
}

const NO_SESSION: RequestContext['session'] = {
  id: null,
  start: () => Promise.reject(new Error('A kept page cannot sign anybody in.')),
  end: () => Promise.reject(new Error('A kept page cannot sign anybody out.')),
}
