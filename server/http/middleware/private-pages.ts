import type { RequestHandler } from 'express'

/** For addresses that are secrets: kept by no cache, in no search, and told to no other page by a link. */
export const keepPrivate: RequestHandler = (_request, response, next) => {
  response.setHeader('Cache-Control', 'no-store')
  response.setHeader('X-Robots-Tag', 'noindex, nofollow, noarchive')
  response.setHeader('Referrer-Policy', 'no-referrer')
  next()
}
