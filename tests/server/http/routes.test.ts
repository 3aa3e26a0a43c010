import express from 'express'
import type request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { DEFAULT_ENTRY_LIMITS } from '#server/http/session/entry-limits.ts'
import { routesOf } from '#server/http/routes.ts'
import type { Role } from '#shared/schemas/values.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'
import { openRow } from '#tests/support/rows.ts'

/**
 * Who gets in where: every route of the running application, for every role. The list of routes is read from the
 * application itself; a route that is missing here fails.
 */
const ROLES = [
  'nobody',
  'without a role',
  'organiser',
  'promoter',
  'witness of other draws',
  'witness of this draw',
  "another organisation's promoter",
  'administrator',
  'organiser, suspended',
  'promoter, suspended',
  'witness, suspended',
  'disabled promoter',
] as const
type RoleName = (typeof ROLES)[number]

const IN = 'in'
/** A row of the table for each kind of route, in the order of ROLES: let in, or refused with this status. */
const WHO = {
  everybody: [IN, IN, IN, IN, IN, IN, IN, IN, IN, IN, IN, IN],
  signedIn: [401, IN, IN, IN, IN, IN, IN, IN, IN, IN, IN, 401],
  signedInPage: [303, IN, IN, IN, IN, IN, IN, IN, IN, IN, IN, 303],
  administrator: [401, 403, 403, 403, 403, 403, 403, IN, 403, 403, 403, 401],
  administratorPage: [303, 403, 403, 403, 403, 403, 403, IN, 403, 403, 403, 303],
  listsDraws: [401, 403, IN, IN, IN, IN, 403, IN, IN, IN, IN, 401],
  readsDraw: [401, 404, IN, IN, 403, IN, 404, 403, IN, IN, IN, 401],
  readsEntrants: [401, 404, IN, IN, 403, 403, 404, 403, IN, IN, 403, 401],
  editsDraw: [401, 404, IN, IN, 403, 403, 404, 403, 403, 403, 403, 401],
  makesDraw: [401, 403, IN, IN, 403, 403, 403, 403, 403, 403, 403, 401],
  runsDraw: [401, 404, 403, IN, 403, 403, 404, 403, 403, 403, 403, 401],
  states: [401, 404, 403, 403, 403, IN, 404, 403, 403, 403, IN, 401],
  readsPeople: [401, 403, IN, IN, 403, 403, 403, 403, IN, IN, 403, 401],
  managesPeople: [401, 403, 403, IN, 403, 403, 403, 403, 403, 403, 403, 401],
} as const satisfies Record<string, readonly (number | typeof IN)[]>

/** Each route: who gets in, and what the request made here then answers. Writes are sent without what they need. */
const TABLE: Record<string, readonly [keyof typeof WHO, number]> = {
  'GET /api/session': ['everybody', 200],
  'POST /api/session': ['everybody', 422],
  'DELETE /api/session': ['everybody', 200],
  'POST /api/account/password': ['signedIn', 422],
  'POST /api/password-resets': ['everybody', 422],
  'GET /api/password-resets/:token': ['everybody', 410],
  'POST /api/password-resets/:token': ['everybody', 422],
  'GET /api/invitations/:token': ['everybody', 410],
  'POST /api/invitations/:token': ['everybody', 422],
  'GET /api/home': ['everybody', 200],
  'GET /api/draws': ['everybody', 200],
  'GET /api/draws/:slug': ['everybody', 200],
  'GET /api/draws/:slug/picks/:pick': ['everybody', 404],
  'GET /api/draws/:slug/odds': ['everybody', 200],
  'GET /api/statistics': ['everybody', 200],
  'GET /api/organisations': ['everybody', 200],
  'GET /api/organisations/:slug': ['everybody', 200],
  'GET /api/site-keys': ['everybody', 200],
  'GET /api/log': ['everybody', 200],
  'GET /api/log/state': ['everybody', 200],
  'GET /api/draws/:slug/log': ['everybody', 200],
  'GET /api/v1/log/checkpoint': ['everybody', 200],
  'GET /api/v1/log/entries': ['everybody', 200],
  'GET /api/v1/log/inclusion': ['everybody', 400],
  'GET /api/v1/log/consistency': ['everybody', 400],
  'GET /api/v1/draws': ['everybody', 200],
  'GET /api/v1/draws/:slug': ['everybody', 200],
  'GET /api/v1/draws/:slug/seal': ['everybody', 404],
  'GET /api/v1/draws/:slug/result': ['everybody', 404],
  'GET /api/v1/draws/:slug/transcript': ['everybody', 404],
  'GET /api/v1/seals/:seal': ['everybody', 404],
  'GET /api/v1/seals/:seal/leaves/:leaf': ['everybody', 404],
  'GET /api/v1/openapi.json': ['everybody', 200],
  'GET /api/entry/:token': ['everybody', 410],
  'GET /api/entry/:token/picks': ['everybody', 410],
  'GET /api/entry/:token/picks/:pick': ['everybody', 410],
  'PUT /api/entry/:token/announcement': ['everybody', 422],
  'POST /api/entry/:token/corrections': ['everybody', 422],
  'POST /api/entry/:token/openings': ['everybody', 410],
  'POST /api/entry-codes': ['everybody', 422],
  'POST /api/entry-links': ['everybody', 422],
  'GET /api/office/organisations/:organisation/draws': ['listsDraws', 200],
  'POST /api/office/organisations/:organisation/draws': ['makesDraw', 422],
  'GET /api/office/draws/:draw': ['readsDraw', 200],
  'PATCH /api/office/draws/:draw': ['editsDraw', 422],
  'PUT /api/office/draws/:draw/prizes': ['editsDraw', 422],
  'POST /api/office/draws/:draw/open': ['runsDraw', 422],
  'POST /api/office/draws/:draw/close': ['runsDraw', 422],
  'POST /api/office/draws/:draw/reopen': ['runsDraw', 422],
  'GET /api/office/draws/:draw/seal': ['readsEntrants', 200],
  'GET /api/office/draws/:draw/odds': ['readsEntrants', 200],
  'POST /api/office/draws/:draw/seal': ['runsDraw', 422],
  'POST /api/office/draws/:draw/postpone': ['runsDraw', 422],
  'POST /api/office/draws/:draw/cancel': ['runsDraw', 422],
  'GET /api/office/draws/:draw/entrants': ['readsEntrants', 200],
  'POST /api/office/draws/:draw/entrants': ['editsDraw', 422],
  'PATCH /api/office/draws/:draw/entrants/:entrant': ['editsDraw', 422],
  'DELETE /api/office/draws/:draw/entrants/:entrant': ['editsDraw', 422],
  'POST /api/office/draws/:draw/entrants/:entrant/link': ['editsDraw', 409],
  'POST /api/office/draws/:draw/slips': ['editsDraw', 422],
  'GET /api/office/draws/:draw/corrections': ['readsEntrants', 200],
  'POST /api/office/draws/:draw/corrections/:correction': ['editsDraw', 422],
  'POST /api/office/draws/:draw/imports': ['editsDraw', 415],
  'GET /api/office/draws/:draw/imports': ['readsEntrants', 200],
  'GET /api/office/draws/:draw/imports/:import': ['readsEntrants', 200],
  'POST /api/office/draws/:draw/imports/:import/apply': ['editsDraw', 409],
  'POST /api/office/draws/:draw/imports/:import/discard': ['editsDraw', 200],
  'POST /api/office/draws/:draw/witnesses': ['runsDraw', 422],
  'DELETE /api/office/draws/:draw/witnesses/:witness': ['runsDraw', 404],
  'POST /api/office/draws/:draw/statements': ['states', 422],
  'GET /api/office/draws/:draw/audit': ['readsEntrants', 200],
  'GET /api/office/organisations/:organisation/people': ['readsPeople', 200],
  'POST /api/office/organisations/:organisation/invitations': ['managesPeople', 422],
  'DELETE /api/office/organisations/:organisation/invitations/:invitation': ['managesPeople', 404],
  'DELETE /api/office/organisations/:organisation/people/:person': ['managesPeople', 404],
  'GET /api/administrator/organisations': ['administrator', 200],
  'POST /api/administrator/organisations': ['administrator', 422],
  'GET /api/administrator/organisations/:organisation': ['administrator', 200],
  'PATCH /api/administrator/organisations/:organisation': ['administrator', 422],
  'POST /api/administrator/organisations/:organisation/state': ['administrator', 422],
  'POST /api/administrator/organisations/:organisation/invitations': ['administrator', 422],
  'POST /api/administrator/people/:person/password-reset': ['administrator', 404],
  'GET /api/administrator/state': ['administrator', 200],
  'POST /api/administrator/jobs/:job/retry': ['administrator', 404],
  'GET /api/administrator/audit': ['administrator', 200],
  // Pages.
  'GET /': ['everybody', 200],
  'GET /draws': ['everybody', 200],
  'GET /draws/:slug': ['everybody', 200],
  'GET /draws/:slug/picks/:pick': ['everybody', 200],
  'GET /draws/:slug/check': ['everybody', 200],
  'GET /draws/:slug/hall': ['everybody', 200],
  'GET /organisations': ['everybody', 200],
  'GET /organisations/:slug': ['everybody', 200],
  'GET /how-it-works': ['everybody', 200],
  'GET /developers': ['everybody', 200],
  'GET /log': ['everybody', 200],
  'GET /entry': ['everybody', 200],
  'GET /entry/:token': ['everybody', 200],
  'GET /sign-in': ['everybody', 200],
  'GET /password-resets': ['everybody', 200],
  'GET /password-resets/:token': ['everybody', 200],
  'GET /invitations/:token': ['everybody', 200],
  'GET /account': ['signedInPage', 200],
  'GET /office{/*path}': ['signedInPage', 200],
  'GET /admin{/*path}': ['administratorPage', 200],
  'GET /{*path}': ['everybody', 200],
  // Files.
  'GET /draws/:slug/seal.json': ['everybody', 404],
  'GET /draws/:slug/seal.sig': ['everybody', 404],
  'GET /draws/:slug/seal.tsr': ['everybody', 404],
  'GET /draws/:slug/entries.csv': ['everybody', 404],
  'GET /draws/:slug/terms.txt': ['everybody', 404],
  'GET /draws/:slug/site-key.pem': ['everybody', 404],
  'GET /draws/:slug/result.json': ['everybody', 404],
  'GET /draws/:slug/result.sig': ['everybody', 404],
  'GET /draws/:slug/transcript.jsonl': ['everybody', 404],
  'GET /draws/:slug/labels.jsonl': ['everybody', 404],
  'GET /draws/:slug/proof.zip': ['everybody', 404],
  'GET /embed/draws/:slug': ['everybody', 200],
  'GET /draws/:slug/card.svg': ['everybody', 200],
  'GET /draws/:slug/qr.svg': ['everybody', 200],
  'GET /organisations/:slug/qr.svg': ['everybody', 200],
  'GET /organisations/:slug/feed.atom': ['everybody', 200],
  'GET /check.html': ['everybody', 404],
  'GET /entry/:token/receipt.json': ['everybody', 410],
  'GET /entry/:token/short-proof.json': ['everybody', 410],
  'GET /site-keys.json': ['everybody', 200],
  'GET /healthz': ['everybody', 200],
  'GET /robots.txt': ['everybody', 200],
  'GET /sitemap.xml': ['everybody', 200],
  'GET /log/checkpoint.txt': ['everybody', 200],
  'GET /favicon.svg': ['everybody', 404],
  'GET /card.png': ['everybody', 404],
  'GET /entrants-sample.csv': ['everybody', 404],
  'GET /assets/*path': ['everybody', 404],
}

interface Place {
  readonly organisation: string
  readonly draw: string
  readonly slug: string
  readonly import: string
}

interface Visitor {
  readonly agent: ReturnType<typeof request.agent>
  readonly place: Place
}

let site: WebSite
const visitors = new Map<RoleName, Visitor>()

beforeAll(async () => {
  // Everybody in the table tries links that fit nobody, from one address.
  const byAddress = { tries: 1000, seconds: 60 }
  site = await startWebSite({ entryLimits: { ...DEFAULT_ENTRY_LIMITS, byAddress, writes: byAddress } })
  const ours = await makePlace('approved')
  const suspended = await makePlace('suspended')
  const theirs = await site.organisation()
  const join = async (role: RoleName, place: Place, held?: Role, organisation = place.organisation) => {
    const person = await site.person()
    if (held) {
      await site.database.pool.query(
        `insert into membership (organisation_id, person_id, role) select id, $2, $3 from organisation where slug = $1`,
        [organisation, person.id, held],
      )
    }
    visitors.set(role, { agent: await site.client(person.email), place })
    return person.id
  }
  const name = (place: Place, person: string) =>
    site.database.pool.query(
      `insert into witness (draw_id, person_id, name, role, connection) values ($1, $2, 'Ada Brandt', 'Trustee', 'None')`,
      [place.draw, person],
    )
  visitors.set('nobody', { agent: await site.client(), place: ours })
  await join('without a role', ours)
  await join('organiser', ours, 'organiser')
  await join('promoter', ours, 'promoter')
  await join('witness of other draws', ours, 'witness')
  await name(ours, await join('witness of this draw', ours, 'witness'))
  await join("another organisation's promoter", ours, 'promoter', theirs.slug)
  await join('organiser, suspended', suspended, 'organiser')
  await join('promoter, suspended', suspended, 'promoter')
  await name(suspended, await join('witness, suspended', suspended, 'witness'))
  const disabled = await join('disabled promoter', ours, 'promoter')
  await site.database.pool.query('update person set disabled_at = now() where id = $1', [disabled])
  const administrator = await site.person({ administrator: true })
  visitors.set('administrator', { agent: await site.client(administrator.email), place: ours })
}, 120_000)
afterAll(() => site.close())

/** An open draw with a faulty import, in an organisation of its own. */
async function makePlace(state: 'approved' | 'suspended'): Promise<Place> {
  const { pool } = site.database
  const row = await openRow(pool)
  const { rows } = await pool.query<{ slug: string; organisation: string }>(
    'select d.slug, o.slug as organisation from draw d join organisation o on o.id = d.organisation_id where d.id = $1',
    [row.drawId],
  )
  const made = await pool.query<{ id: string }>(
    `insert into entrant_import (draw_id, file_name, state, bytes_total, created_at, touched_at)
     values ($1, 'stubs.csv', 'faulty', 10, now(), now()) returning id`,
    [row.drawId],
  )
  if (state === 'suspended') {
    await pool.query(`update organisation set state = 'suspended' where id = $1`, [row.organisationId])
  }
  const [found] = rows
  if (!found) throw new Error('The draw was not made.')
  return { ...found, draw: row.drawId, import: made.rows[0]?.id ?? '' }
}

const ELSEWHERE = '0b6d1f8a-3f5f-4c57-9e5b-2d0f6b1f9c77'

function addressOf(path: string, place: Place): string {
  const values: Record<string, string> = {
    organisation: place.organisation,
    draw: place.draw,
    slug: path.includes('organisations') ? place.organisation : place.slug,
    import: place.import,
    token: 'x'.repeat(43),
    pick: '0',
    seal: 'ab'.repeat(32),
    leaf: '0',
    entrant: '1',
    correction: '1',
    witness: ELSEWHERE,
    person: ELSEWHERE,
    invitation: ELSEWHERE,
    job: ELSEWHERE,
  }
  return path
    .replace('/{*path}', '/no-such-page')
    .replace('{/*path}', '/somewhere/within')
    .replace('*path', 'none.js')
    .replace(/:([a-z]+)/g, (_, name: string) => values[name] ?? expect.fail(`no value for :${name}`))
}

/** The status, and whether it is a refusal: a 404 of a handler says what there is none of. */
async function visit(route: string, role: RoleName): Promise<string> {
  const visitor = visitors.get(role)
  if (!visitor) throw new Error(`There is no ${role}.`)
  const [method = '', path = ''] = route.split(' ')
  const answer = await visitor.agent[method.toLowerCase() as 'get' | 'post'](addressOf(path, visitor.place))
  const body = answer.body as { detail?: string }
  const refused = [303, 401, 403].includes(answer.status) || body.detail === 'There is nothing at this address.'
  return refused ? `refused ${answer.status}` : `in ${answer.status}`
}

function expected(route: string, role: RoleName): string {
  const row = TABLE[route]
  if (!row) return 'not in the table'
  const cell = WHO[row[0]][ROLES.indexOf(role)]
  return cell === IN ? `in ${row[1]}` : `refused ${cell}`
}

/** Public look-ups that find nothing say the same as a refusal, to everybody alike. */
const FINDS_NOTHING = new Set([
  'GET /api/draws/:slug/picks/:pick',
  'GET /api/v1/draws/:slug/seal',
  'GET /api/v1/draws/:slug/result',
  'GET /api/v1/draws/:slug/transcript',
  'GET /api/v1/seals/:seal',
  'GET /api/v1/seals/:seal/leaves/:leaf',
  'GET /favicon.svg',
  'GET /card.png',
  'GET /entrants-sample.csv',
  'GET /assets/*path',
])

describe('routes', () => {
  it('are the same in the running application and in this table', () => {
    expect(routesOf(site.app).sort()).toEqual(Object.keys(TABLE).sort())
  })

  it('fail at the start where one has no rule, or hides in a router', () => {
    const { app } = site
    const { length } = app.router.stack
    app.get('/backdoor', (_request, response) => void response.end())
    expect(routesOf(app)).toContain('GET /backdoor')
    app.router.stack.length = length
    app.use(express.Router().get('/hidden', (_request, response) => void response.end()))
    expect(() => routesOf(app)).toThrow('nested router')
    app.router.stack.length = length
  })

  // Signing out comes last: it ends the session that the other requests need.
  const last = 'DELETE /api/session'
  for (const route of [...Object.keys(TABLE).filter((one) => one !== last), last]) {
    it(`${route}: ${TABLE[route]?.[0]}`, async () => {
      const found: Record<string, string> = {}
      const wanted: Record<string, string> = {}
      for (const role of ROLES) {
        found[role] = await visit(route, role)
        wanted[role] = FINDS_NOTHING.has(route) ? 'refused 404' : expected(route, role)
      }
      expect(found).toEqual(wanted)
    })
  }
})
