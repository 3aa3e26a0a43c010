import express, { type Express, type Request, type RequestHandler } from 'express'
import type { RequestContext } from '#server/http/endpoints/context.ts'
import type { Registry } from '#server/http/endpoints/registry.ts'
import { receiveUpload, uploadAnswer } from '#server/http/endpoints/upload.ts'
import { problem } from '#server/http/problems.ts'
import { uploadImport } from '#shared/schemas/api/office.ts'
import type { Endpoint } from '#shared/schemas/endpoint.ts'
import { isPublicEndpoint } from '#shared/schemas/public-endpoint.ts'

/** A thousand prizes with their descriptions are longer than other bodies. */
const LONG_BODIES: ReadonlySet<string> = new Set(['putPrizes'])

export type ContextOf = (request: Request) => RequestContext

/** Puts the site's own endpoints onto the application. `afterWrite` runs once a call that may have changed something is done. */
export function mountEndpoints(app: Express, registry: Registry, contextOf: ContextOf, afterWrite: () => void): void {
  const short = jsonBody('100kb')
  const long = jsonBody('2mb')
  for (const endpoint of registry.endpoints.filter((one) => !isPublicEndpoint(one))) {
    const method = endpoint.method.toLowerCase() as 'get' | 'post' | 'put' | 'patch' | 'delete'
    const before: RequestHandler[] =
      endpoint.name === uploadImport.name
        ? uploads(registry, endpoint, contextOf)
        : method === 'get'
          ? []
          : [LONG_BODIES.has(endpoint.name) ? long : short, onlyJson]
    app[method](endpoint.path, noStore, ...before, async (request, response) => {
      const answer =
        endpoint.name === uploadImport.name
          ? uploadAnswer(request)
          : await registry.call(endpoint, contextOf(request), {
              params: request.params,
              query: request.query,
              body: request.body as unknown,
            })
      if (method !== 'get') afterWrite()
      response.status(200).json(answer)
    })
  }
}

/** Who may see an answer of the API depends on the session: nothing between keeps it. */
const noStore: RequestHandler = (_request, response, next) => {
  response.setHeader('Cache-Control', 'no-store')
  next()
}

function jsonBody(limit: string): RequestHandler {
  return express.json({ limit, type: 'application/json', strict: true })
}

const onlyJson: RequestHandler = (request, _response, next) => {
  const hasBody =
    request.headers['transfer-encoding'] !== undefined || Number(request.headers['content-length'] ?? 0) > 0
  if (hasBody && !request.is('application/json')) {
    return next(problem(415, 'Send the body as application/json.'))
  }
  next()
}

function uploads(registry: Registry, endpoint: Endpoint, contextOf: ContextOf): RequestHandler[] {
  return [
    // Who may not import is told so before 200 MB are on their way.
    async (request, response, next) => {
      try {
        await registry.authorise(endpoint, contextOf(request), request.params)
        next()
      } catch (error) {
        response.setHeader('Connection', 'close')
        next(error)
      }
    },
    ...receiveUpload((request, upload) =>
      registry.call(endpoint, contextOf(request), { params: request.params, query: request.query, body: {} }, upload),
    ),
  ]
}
