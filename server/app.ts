import type { IncomingMessage, RequestListener, ServerResponse } from 'node:http'
import compression from 'compression'
import express, { type Express, type Request } from 'express'
import type { Logger } from 'pino'
import type { Passwords } from '#server/adapters/passwords/passwords.ts'
import type { Config } from '#server/config/config.ts'
import { NOBODY } from '#server/http/authorisation/actor.ts'
import { endpointRules } from '#server/http/authorisation/rules.ts'
import type { RequestContext } from '#server/http/endpoints/context.ts'
import { mountEndpoints } from '#server/http/endpoints/mount.ts'
import { mountPublicApi } from '#server/http/endpoints/public-api.ts'
import { createRegistry } from '#server/http/endpoints/registry.ts'
import { mountCheckPage } from '#server/http/files/check-page.ts'
import { mountDrawFiles } from '#server/http/files/draw-files.ts'
import { mountEntryFiles } from '#server/http/files/entry-files.ts'
import { LockedArchives } from '#server/http/files/locked-archives.ts'
import { mountLogFiles } from '#server/http/files/log-files.ts'
import { mountSiteFiles } from '#server/http/files/site-files.ts'
import { mountStaticFiles } from '#server/http/files/static-files.ts'
import { createHandlers } from '#server/http/handlers/all.ts'
import { mountPieces } from '#server/http/pieces/mount-pieces.ts'
import { refuseCrossSiteWrites } from '#server/http/middleware/cross-site.ts'
import { errorHandler, noSuchEndpoint } from '#server/http/middleware/errors.ts'
import { openToOtherSites } from '#server/http/middleware/open-reads.ts'
import { requestLog } from '#server/http/middleware/request-log.ts'
import { securityHeaders } from '#server/http/middleware/security-headers.ts'
import { mountPages } from '#server/http/pages/mount-pages.ts'
import { PageCache } from '#server/http/pages/page-cache.ts'
import type { Renderer } from '#server/http/pages/renderer.ts'
import { createProblemOf } from '#server/http/problem-of.ts'
import { createSessions, signedInPersonId } from '#server/http/session/sessions.ts'
import { createEntryGuard, type EntryLimits } from '#server/http/session/entry-limits.ts'
import { createSignInGuard, type SignInLimits } from '#server/http/session/sign-in-limits.ts'
import { checkEveryRouteHasItsRule } from '#server/http/routes.ts'
import type { Services } from '#server/services.ts'
import { findResource, findSignedIn } from '#server/store/queries/people.ts'
import { instantOf, wholeSecond } from '#server/time/instants.ts'
import { allEndpoints } from '#shared/schemas/api/all.ts'

export type SiteConfig = Pick<Config, 'origin' | 'trustedProxies' | 'sessionSecrets' | 'local' | 'mailPageUrl'>

export interface SiteParts {
  readonly config: SiteConfig
  readonly services: Services
  readonly passwords: Passwords
  readonly renderer: Renderer
  readonly logger: Logger
  /** The folder of the build: static files are served from it. */
  readonly build: string
  readonly version: string
  readonly limits?: SignInLimits
  readonly entryLimits?: EntryLimits
  /** Further middleware before everything else, for development. */
  readonly before?: (app: Express) => void
}

export interface SiteApp {
  /** For tests that read its routes. */
  readonly app: Express
  /** What the HTTP server calls for each request. */
  readonly listener: RequestListener
  close(): Promise<void>
}

/** Composes the site. Throws where an endpoint has no handler, or any route no rule. */
export function createSite(parts: SiteParts): SiteApp {
  const { config, services, logger } = parts
  const https = config.origin.startsWith('https:')
  const app = express()
  app.disable('x-powered-by')
  app.set('etag', false)
  app.set('query parser', 'simple')
  app.set('trust proxy', config.trustedProxies)

  const sessions = createSessions({
    pool: services.pool,
    secrets: config.sessionSecrets,
    https,
    onError: (details) => logger.error({ details }, 'sessions'),
  })
  const cache = new PageCache({ sessionCookie: sessions.cookieName })
  const archives = new LockedArchives(services.store)
  const unexpected = (error: unknown) => logger.error({ err: error }, 'unexpected')
  const problemOf = createProblemOf(unexpected)
  const entryGuard = createEntryGuard(services.pool, parts.entryLimits)
  const registry = createRegistry(
    allEndpoints,
    endpointRules,
    createHandlers({
      services,
      site: config,
      passwords: parts.passwords,
      guard: createSignInGuard(services.pool, parts.limits),
      entryGuard,
    }),
    (on, key) => findResource(services.db, on, key),
  )

  const contexts = new WeakMap<Request, RequestContext>()
  const contextOf = (request: Request): RequestContext => {
    const context = contexts.get(request)
    if (!context) throw new Error('The context of a request is made before its route runs.')
    return context
  }

  parts.before?.(app)
  app.use(requestLog(logger))
  app.use(securityHeaders({ https }))
  app.use(refuseCrossSiteWrites({ origin: config.origin }))
  app.use(openToOtherSites)
  app.use(compression({ threshold: 1024 }))
  mountStaticFiles(app, parts.build)
  mountCheckPage(app, parts.build)
  mountSiteFiles(app, { services, origin: config.origin, version: parts.version })
  mountLogFiles(app, services)
  mountDrawFiles(app, { db: services.db, keys: services.signing, archives })
  mountEntryFiles(app, services, entryGuard)
  mountPieces(app, services)
  mountPublicApi(app, registry, { origin: config.origin, version: parts.version })

  // From here on it matters who asks.
  app.use(sessions.middleware)
  app.use(async (request, response, next) => {
    const now = new Date()
    const personId = signedInPersonId(request, now)
    const person = personId === null ? null : await findSignedIn(services.db, personId)
    contexts.set(request, {
      actor: person ? { person, memberships: person.memberships } : NOBODY,
      session: sessions.control(request, response, now),
      address: request.ip ?? '',
      requestId: String(request.id),
    })
    next()
  })
  mountEndpoints(app, registry, contextOf, () => cache.clear())
  app.use('/api', noSuchEndpoint)
  mountPages(app, {
    renderer: parts.renderer,
    registry,
    contextOf,
    problemOf,
    cache,
    origin: config.origin,
    now: () => instantOf(wholeSecond(services.clock.now())),
    onError: unexpected,
  })
  checkEveryRouteHasItsRule(app, registry)
  app.use(noSuchEndpoint)
  app.use(errorHandler(problemOf))

  return {
    app,
    // Kept pages go out before Express: no session, no query, and no line in the log for each of a crowd.
    listener: (request: IncomingMessage, response: ServerResponse) => {
      if (!cache.serve(request, response)) app(request, response)
    },
    async close() {
      await Promise.all([sessions.close(), archives.close()])
    },
  }
}
