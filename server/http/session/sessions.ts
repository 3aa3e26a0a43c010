import connectPgSimple from 'connect-pg-simple'
import type { Request, RequestHandler, Response } from 'express'
import session from 'express-session'
import type { Pool } from 'pg'
import type { SessionControl } from '#server/http/endpoints/context.ts'

declare module 'express-session' {
  interface SessionData {
    personId: string
    /** When the person signed in, milliseconds since 1970. */
    startedAt: number
  }
}

/** A session ends after this long without a request … */
export const IDLE_SECONDS = 8 * 60 * 60
/** … and at the latest this long after sign-in. */
export const ABSOLUTE_SECONDS = 3 * 24 * 60 * 60

export interface Sessions {
  readonly cookieName: string
  readonly middleware: RequestHandler
  /** Starting and ending the session of one request. `now` is the moment of the request. */
  control(request: Request, response: Response, now: Date): SessionControl
  close(): Promise<void>
}

/**
 * Sessions in PostgreSQL. Over HTTPS the cookie bears the `__Host-` prefix (RFC 6265bis): bound to this host, sent over TLS
 * only. A visitor who does not sign in gets no cookie and costs no query.
 */
export function createSessions(options: {
  readonly pool: Pool
  /** The first signs, all are accepted. */
  readonly secrets: readonly string[]
  readonly https: boolean
  readonly onError: (error: unknown) => void
}): Sessions {
  const PgStore = connectPgSimple(session)
  const store = new PgStore({
    pool: options.pool,
    tableName: 'session',
    ttl: IDLE_SECONDS,
    pruneSessionInterval: 15 * 60,
    errorLog: (...details: unknown[]) => options.onError(details),
  })
  const cookieName = options.https ? '__Host-evenpenny' : 'evenpenny'
  // Behind a proxy the application's `trust proxy` decides whether the request came over TLS.
  const cookie = { path: '/', httpOnly: true, sameSite: 'lax', secure: options.https } as const
  return {
    cookieName,
    middleware: session({
      name: cookieName,
      secret: [...options.secrets],
      store,
      resave: false,
      saveUninitialized: false,
      cookie,
    }),
    control: (request, response, now) => ({
      get id() {
        return request.session?.personId ? request.sessionID : null
      },
      async start(personId) {
        // A new id, so that one known from before the sign-in is worth nothing after it.
        await settle((done) => request.session.regenerate(done))
        request.session.personId = personId
        request.session.startedAt = now.getTime()
        await settle((done) => request.session.save(done))
      },
      async end() {
        await settle((done) => request.session.destroy(done))
        response.clearCookie(cookieName, cookie)
      },
    }),
    close: async () => store.close(),
  }
}

/** The person who signed in on this request's session, unless it has outlived its longest time. */
export function signedInPersonId(request: Request, now: Date): string | null {
  const { personId, startedAt } = request.session
  if (!personId || typeof startedAt !== 'number') return null
  return now.getTime() - startedAt < ABSOLUTE_SECONDS * 1000 ? personId : null
}

function settle(action: (done: (error?: unknown) => void) => void): Promise<void> {
  return new Promise((resolve, reject) => action((error) => (error ? reject(error as Error) : resolve())))
}
