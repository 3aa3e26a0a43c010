import { randomBytes } from 'node:crypto'
import { mkdtempSync, rmSync } from 'node:fs'
import type { RequestListener } from 'node:http'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Writable } from 'node:stream'
import type { Express } from 'express'
import { pino } from 'pino'
import request from 'supertest'
import type { Clock } from '#server/adapters/clock/clock.ts'
import { createPasswords } from '#server/adapters/passwords/passwords.ts'
import { createSite, type SiteParts } from '#server/app.ts'
import type { Config } from '#server/config/config.ts'
import type { Render } from '#server/http/pages/renderer.ts'
import type { Role } from '#shared/schemas/values.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

/** The password of every person that a test site makes. */
export const PASSWORD = 'three unrelated words'

/** A test site with its whole HTTP side in this process. */
export interface WebSite extends TestSite {
  readonly origin: string
  readonly app: Express
  readonly listener: RequestListener
  /** Everything that the site has logged, as text. */
  readonly log: () => string
  person(options?: { readonly administrator?: boolean; readonly name?: string }): Promise<{ id: string; email: string }>
  organisation(state?: 'pending' | 'approved' | 'suspended'): Promise<{ id: string; slug: string }>
  member(organisationId: string, personId: string, role: Role): Promise<void>
  /** A client that keeps cookies, signed in where an address is given. */
  client(email?: string): Promise<ReturnType<typeof request.agent>>
  /** The newest queued mail of a kind to an account, opened. */
  accountMail(kind: 'invitation' | 'password-reset'): Promise<{ readonly to: string; readonly link: string }>
}

/** Renders nothing but what it was asked for: real pages need the built bundle. `/nothing` is the page of no address. */
export const plainRender: Render = async (asked, context) => {
  const { pathname } = new URL(asked.url)
  const body = `<html><script nonce="${context.nonce}"></script><p>${pathname} at ${context.now}</p></html>`
  return {
    status: pathname === '/nothing' ? 404 : 200,
    headers: { 'content-type': 'text/html; charset=utf-8' },
    pipe: (destination) => void destination.end(body),
  }
}

/** `clock` moves the time of demo organisations, as in {@link startTestSite}. */
export async function startWebSite(
  options: Partial<SiteParts> = {},
  settings: Partial<Config> = {},
  clock?: Clock,
): Promise<WebSite> {
  const base = await startTestSite(clock ? { clock } : {})
  const { database, services } = base
  const config = { ...base.config, ...settings }
  const passwords = createPasswords({ cost: 4, threads: 1 })
  const build = mkdtempSync(join(tmpdir(), 'evenpenny-build-'))
  const lines: string[] = []
  const sink = new Writable({
    write(chunk: Buffer, _encoding, done) {
      lines.push(chunk.toString())
      done()
    },
  })
  const site = createSite({
    config,
    services,
    passwords,
    renderer: { render: plainRender, assets: { scripts: [], styles: [], preload: [] } },
    logger: pino({ level: 'debug' }, sink),
    build,
    version: '0.0.0-test',
    ...options,
  })
  const hash = await passwords.hash(PASSWORD)
  const one = async <T>(text: string, values: unknown[]): Promise<T> =>
    (await database.pool.query(text, values)).rows[0] as T
  return {
    ...base,
    origin: config.origin,
    app: site.app,
    listener: site.listener,
    log: () => lines.join(''),
    person: ({ administrator = false, name = 'Ines Okafor' } = {}) =>
      one(
        'insert into person (email, name, password_hash, administrator) values ($1, $2, $3, $4) returning id, email',
        [`p${randomBytes(5).toString('hex')}@group.example`, name, hash, administrator],
      ),
    organisation: (state = 'approved') =>
      one(
        `insert into organisation (slug, name, address, about, time_zone, currency, state)
         values ($1, 'Rowan Street Band', '1 Rowan Street', 'A brass band.', 'Europe/London', 'GBP', $2)
         returning id, slug`,
        [`org-${randomBytes(5).toString('hex')}`, state],
      ),
    async member(organisationId, personId, role) {
      await one('insert into membership (organisation_id, person_id, role) values ($1, $2, $3)', [
        organisationId,
        personId,
        role,
      ])
    },
    async client(email) {
      const agent = request.agent(site.listener)
      if (email !== undefined) await agent.post('/api/session').send({ email, password: PASSWORD }).expect(200)
      return agent
    },
    async accountMail(kind) {
      const row = await one<{ key: string; payload: Buffer } | undefined>(
        `select m.key, c.payload from mail m join mail_content c on c.mail_id = m.id
         where m.kind = $1 order by m.id desc limit 1`,
        [kind],
      )
      if (!row) throw new Error(`No mail of the kind ${kind} is queued.`)
      const opened = services.secrets.open(new Uint8Array(row.payload), `mail:${row.key}`)
      return JSON.parse(Buffer.from(opened).toString()) as { to: string; link: string }
    },
    async close() {
      await site.close()
      await passwords.close()
      await base.close()
      rmSync(build, { recursive: true, force: true })
    },
  }
}
