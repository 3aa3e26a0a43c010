import type { IncomingMessage } from 'node:http'
import type { RequestHandler } from 'express'
import { problem } from '#server/http/problems.ts'

const SAFE = new Set(['GET', 'HEAD', 'OPTIONS'])

/**
 * Refuses writes that another site's page caused (Fetch Metadata, W3C; Origin, RFC 6454). Both headers are the browser's
 * own and out of a page's reach; a client that sends neither is no browser, and carries nobody's cookies but its own.
 */
export function refuseCrossSiteWrites(options: { readonly origin: string }): RequestHandler {
  return (request, _response, next) => {
    if (SAFE.has(request.method) || sameSite(request, options.origin, request.protocol)) return next()
    next(
      problem(403, 'This request came from another website, so it was not carried out. Open this site and try there.', {
        code: 'cross-site',
      }),
    )
  }
}

function sameSite(request: IncomingMessage, origin: string, protocol: string): boolean {
  const site = request.headers['sec-fetch-site']
  if (site !== undefined && site !== 'same-origin' && site !== 'none') return false
  const from = request.headers.origin
  if (from === undefined) return true
  // The second form lets people open a local site as localhost or as 127.0.0.1.
  return from === origin || from === `${protocol}://${request.headers.host}`
}
