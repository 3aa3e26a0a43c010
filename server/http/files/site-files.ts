import type { Express } from 'express'
import { sql } from 'drizzle-orm'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { getSiteKeys } from '#server/store/queries/site-keys.ts'
import { publicSlugs } from '#server/store/queries/public-files.ts'

export interface SiteFileParts {
  readonly services: Pick<Services, 'db' | 'sha256' | 'site'>
  readonly origin: string
  readonly version: string
}

const DATABASE_ANSWERS_WITHIN_MS = 3000

/**
 * `/healthz` for whatever watches the site, `/robots.txt` and `/sitemap.xml` for search engines, `/site-keys.json` for whoever
 * compares keys.
 */
export function mountSiteFiles(app: Express, { services, origin, version }: SiteFileParts): void {
  const { db } = services
  app.get('/site-keys.json', async (_request, response) => {
    response.setHeader('Cache-Control', 'public, max-age=300')
    response.setHeader('Access-Control-Allow-Origin', '*')
    response.setHeader('Cross-Origin-Resource-Policy', 'cross-origin')
    response.json(await getSiteKeys(services))
  })
  app.get('/healthz', async (_request, response) => {
    response.setHeader('Cache-Control', 'no-store')
    const answers = await answersInTime(db)
    response.status(answers ? 200 : 503).json({ status: answers ? 'ok' : 'database-unreachable', version })
  })
  app.get('/robots.txt', (_request, response) => {
    response.setHeader('Cache-Control', 'public, max-age=3600')
    response.type('text/plain').send(
      // The files beside a draw's page may be read: nothing in them is private.
      ['User-agent: *', 'Disallow: /office', 'Disallow: /admin', 'Disallow: /entry/', 'Disallow: /invitations/']
        .concat(['Disallow: /password-resets/', 'Disallow: /api/', `Sitemap: ${origin}/sitemap.xml`, ''])
        .join('\n'),
    )
  })
  app.get('/sitemap.xml', async (_request, response) => {
    const paths = ['/', '/draws', '/organisations', '/how-it-works', '/developers', '/log']
    for (const slug of await publicSlugs(db)) paths.push(`/draws/${slug}`)
    // Slugs are a-z, 0-9 and hyphens: nothing in these addresses needs escaping.
    const urls = paths.map((path) => `<url><loc>${origin}${path}</loc></url>`).join('\n')
    response.setHeader('Cache-Control', 'public, max-age=3600')
    response
      .type('application/xml')
      .send(
        `<?xml version="1.0" encoding="UTF-8"?>\n<urlset xmlns="http://www.sitemaps.org/schemas/sitemap/0.9">\n${urls}\n</urlset>\n`,
      )
  })
}

async function answersInTime(db: Database): Promise<boolean> {
  let timer: NodeJS.Timeout | undefined
  const late = new Promise<boolean>((resolve) => {
    timer = setTimeout(() => resolve(false), DATABASE_ANSWERS_WITHIN_MS)
  })
  const asked = db.execute(sql`select 1`).then(
    () => true,
    () => false,
  )
  try {
    return await Promise.race([asked, late])
  } finally {
    clearTimeout(timer)
  }
}
