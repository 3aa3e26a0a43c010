import { randomUUID } from 'node:crypto'
import type { RequestHandler } from 'express'
import type { Logger } from 'pino'
import { pinoHttp } from 'pino-http'

/**
 * One line for each request: id, method, path without query, status, time. No cookie, no header, no body, no query (people
 * type names into searches), no address, and no token in a path.
 */
export function requestLog(logger: Logger): RequestHandler {
  return pinoHttp({
    logger,
    quietReqLogger: true,
    // A visitor's own X-Request-Id is not taken over: it would let them write into the log.
    genReqId: (_request, response) => {
      const id = randomUUID()
      response.setHeader('X-Request-Id', id)
      return id
    },
    customLogLevel: (_request, response, error) =>
      error || response.statusCode >= 500 ? 'error' : response.statusCode >= 400 ? 'info' : 'debug',
    serializers: {
      req: (request: { id: unknown; method: string; url: string }) => ({
        id: request.id,
        method: request.method,
        path: loggablePath(request.url),
      }),
      res: (response: { statusCode: number }) => ({ status: response.statusCode }),
    },
  }) as RequestHandler
}

/** A path fit for a log: without its query, and with every secret link's token struck out. */
export function loggablePath(url: string): string {
  const path = url.split('?', 1)[0] ?? ''
  return path.replace(/\/(invitations?|password-resets?|reset-password|entry|set-password)\/[^/]+/gi, '/$1/…')
}
