import type { RequestHandler } from 'express'
import { problem } from '#server/http/problems.ts'
import { PUBLIC_API } from '#shared/schemas/public-endpoint.ts'

/** The public API, and what lies beside the page of a draw or an organisation: files, pictures, feeds. */
const OPEN = new RegExp(`^(?:${PUBLIC_API}/|/(?:draws|organisations)/[^/]+/[\\w-]+\\.[a-z]+$)`)

/**
 * Lets pages of every origin read what is public anyway (Fetch standard, CORS), never with credentials, and answers the
 * question that browsers ask before conditional and ranged requests.
 */
export const openToOtherSites: RequestHandler = (request, response, next) => {
  if (!OPEN.test(request.path)) return next()
  response.setHeader('Access-Control-Allow-Origin', '*')
  response.setHeader('Access-Control-Expose-Headers', 'ETag, Content-Length, X-Request-Id')
  response.setHeader('Cross-Origin-Resource-Policy', 'cross-origin')
  if (request.method === 'OPTIONS') {
    response.setHeader('Allow', 'GET, HEAD, OPTIONS')
    response.setHeader('Access-Control-Allow-Methods', 'GET, HEAD')
    response.setHeader('Access-Control-Allow-Headers', 'If-None-Match, Accept')
    response.setHeader('Access-Control-Max-Age', '86400')
    response.status(204).end()
    return
  }
  if (request.method !== 'GET' && request.method !== 'HEAD') {
    response.setHeader('Allow', 'GET, HEAD, OPTIONS')
    return next(problem(405, 'This can only be read: ask with GET or HEAD.'))
  }
  next()
}
