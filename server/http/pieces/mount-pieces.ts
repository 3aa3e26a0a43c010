import { createHash } from 'node:crypto'
import type { Express, Request, Response } from 'express'
import { atomFeed } from '#server/http/pieces/atom.ts'
import { type CardFacts, cardFacts } from '#server/http/pieces/card-facts.ts'
import { onlyThisStyle } from '#server/http/pieces/card-look.ts'
import { cardPage, PAGE_STYLE } from '#server/http/pieces/card-page.ts'
import { cardSvg, SVG_STYLE } from '#server/http/pieces/card-svg.ts'
import { qrSvg } from '#server/http/pieces/qr.ts'
import { notFound } from '#server/http/problems.ts'
import type { Services } from '#server/services.ts'
import { getDraw } from '#server/store/queries/draw-page.ts'
import { feedOf } from '#server/store/queries/feed.ts'
import { slug as slugSchema } from '#shared/schemas/values.ts'

const SVG_POLICY = onlyThisStyle(SVG_STYLE)
const PAGE_POLICY = `${onlyThisStyle(PAGE_STYLE)}; frame-ancestors *`
/** Seen by many at once, and never wrong for longer than a minute. */
const MINUTE = 'public, max-age=60'
const DAY = 'public, max-age=86400'

/** Puts onto the application what other sites show of a draw or an organisation: cards, codes, feeds. */
export function mountPieces(app: Express, services: Pick<Services, 'db' | 'clock' | 'site'>): void {
  const { db, site } = services
  const factsOf = async (request: Request): Promise<CardFacts> => {
    const draw = await getDraw(services, slugOf(request))
    if (!draw) throw notFound()
    return cardFacts(draw, site.origin)
  }
  app.get('/embed/draws/:slug', async (request, response) => {
    const page = cardPage(await factsOf(request))
    response.setHeader('Content-Security-Policy', PAGE_POLICY)
    // The older header knows no "anyone may": the policy alone decides.
    response.removeHeader('X-Frame-Options')
    response.setHeader('Cross-Origin-Resource-Policy', 'cross-origin')
    send(page, 'text/html; charset=utf-8', MINUTE, response)
  })
  app.get('/draws/:slug/card.svg', async (request, response) => {
    response.setHeader('Content-Security-Policy', SVG_POLICY)
    send(cardSvg(await factsOf(request)), 'image/svg+xml; charset=utf-8', MINUTE, response)
  })
  app.get('/draws/:slug/qr.svg', async (request, response) => {
    const { page } = await factsOf(request)
    send(qrSvg(page, `QR code of ${page}`), 'image/svg+xml; charset=utf-8', DAY, response)
  })
  app.get('/organisations/:slug/qr.svg', async (request, response) => {
    const slug = slugOf(request)
    if (!(await feedOf(db, slug))) throw notFound()
    const page = `${site.origin}/organisations/${slug}`
    send(qrSvg(page, `QR code of ${page}`), 'image/svg+xml; charset=utf-8', DAY, response)
  })
  app.get('/organisations/:slug/feed.atom', async (request, response) => {
    const facts = await feedOf(db, slugOf(request))
    if (!facts) throw notFound()
    send(atomFeed(facts, site.origin), 'application/atom+xml; charset=utf-8', MINUTE, response)
  })
}

function slugOf(request: Request): string {
  const slug = slugSchema.safeParse(request.params.slug)
  if (!slug.success) throw notFound()
  return slug.data
}

function send(body: string, type: string, caching: string, response: Response): void {
  response.setHeader('ETag', `W/"${createHash('sha256').update(body).digest('base64url').slice(0, 32)}"`)
  response.setHeader('Cache-Control', caching)
  response.setHeader('Content-Type', type)
  // Express answers 304 where the reader has this very tag.
  response.send(body)
}
