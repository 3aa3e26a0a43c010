import { createHash } from 'node:crypto'
import type { Express, Request, Response } from 'express'
import { NOBODY } from '#server/http/authorisation/actor.ts'
import type { RequestContext } from '#server/http/endpoints/context.ts'
import type { Registry } from '#server/http/endpoints/registry.ts'
import { openApiDocument } from '#shared/schemas/openapi.ts'
import { isPublicEndpoint, PUBLIC_API, type PublicEndpoint } from '#shared/schemas/public-endpoint.ts'

/**
 * Puts the public API onto the application. Nobody is asked who they are: no session is read or written, so an answer can
 * be kept by anything between.
 */
export function mountPublicApi(
  app: Express,
  registry: Registry,
  site: { readonly origin: string; readonly version: string },
): void {
  const description = JSON.stringify(openApiDocument(registry.endpoints, site))
  app.get(`${PUBLIC_API}/openapi.json`, (_request, response) => send(description, 'revalidate', response))
  for (const endpoint of registry.endpoints.filter(isPublicEndpoint)) {
    app.get(endpoint.path, async (request, response) => {
      const input = { params: request.params, query: request.query, body: {} }
      const answer = await registry.call(endpoint, strangerOf(request), input)
      send(JSON.stringify(answer), endpoint.caching, response)
    })
  }
}

function send(body: string, caching: PublicEndpoint['caching'], response: Response): void {
  // Weak (RFC 9110, 8.8.3): compression on the way changes the bytes, not what they say.
  response.setHeader('ETag', `W/"${createHash('sha256').update(body).digest('base64url').slice(0, 32)}"`)
  response.setHeader(
    'Cache-Control',
    caching === 'immutable' ? 'public, max-age=31536000, immutable' : 'public, no-cache',
  )
  response.setHeader('Content-Type', 'application/json; charset=utf-8')
  // Express answers 304 where the reader has this very tag.
  response.send(body)
}

const refuse = () => Promise.reject(new Error('The public API has no sessions.'))

function strangerOf(request: Request): RequestContext {
  return {
    actor: NOBODY,
    session: { id: null, start: refuse, end: refuse },
    address: request.ip ?? '',
    requestId: String(request.id),
  }
}
