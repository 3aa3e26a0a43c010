import { gunzipSync } from 'node:zlib'
import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import type { Render } from '#server/http/pages/renderer.ts'
import { getOfficeDraw, listOfficeDraws } from '#shared/schemas/api/office.ts'
import { getDraw } from '#shared/schemas/api/public.ts'
import { getSession } from '#shared/schemas/api/session.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { draftRow } from '#tests/support/rows.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'

let site: WebSite
let renderings = 0

/** Pages that show what their API client gives them, as the real ones do. */
const render: Render = async (asked, { api, nonce }) => {
  renderings++
  const { pathname } = new URL(asked.url)
  const [, part, key = ''] = pathname.split('/')
  if (pathname === '/office/away') return new Response(null, { status: 302, headers: { Location: '/office' } })
  let status = 200
  let words = ''
  try {
    if (part === 'draws' && key) {
      const draw = await api.call(getDraw, { params: { slug: key } })
      words = `${draw.title} is ${draw.state}`
    } else if (part === 'office' && key) {
      const { draws } = await api.call(listOfficeDraws, { params: { organisation: key } })
      words = `${draws.length} draws`
    } else if (part === 'admin') {
      words = `administrator ${(await api.call(getSession)).person?.name}`
      await api.call(listOfficeDraws, { params: { organisation: 'anything' } })
    }
  } catch (error) {
    if (!(error instanceof Problem)) throw error
    status = error.details.status
    words += ` refused: ${error.details.detail}`
  }
  return {
    status,
    headers: { 'content-type': 'text/html; charset=utf-8' },
    pipe: (to) => void to.end(`<p>${words}</p><script nonce="${nonce}"></script>`),
  }
}

beforeAll(async () => {
  site = await startWebSite({ renderer: { render, assets: { scripts: [], styles: [], preload: [] } } })
})
afterAll(() => site.close())

/** A draft that can be opened, and its promoter. */
async function makeDraft() {
  const row = await draftRow(site.database.pool)
  const { rows } = await site.database.pool.query<{ slug: string; organisation: string }>(
    'select d.slug, o.slug as organisation from draw d join organisation o on o.id = d.organisation_id where d.id = $1',
    [row.drawId],
  )
  const promoter = await site.person()
  await site.member(row.organisationId, promoter.id, 'promoter')
  return { ...row, slug: rows[0]?.slug ?? '', organisation: rows[0]?.organisation ?? '', promoter }
}

describe('pages', () => {
  it('are read with the rights of whoever asks', async () => {
    const { organisation, promoter } = await makeDraft()
    const stranger = await site.person()
    const ours = await (await site.client(promoter.email)).get(`/office/${organisation}`)
    expect([ours.status, ours.text]).toEqual([200, expect.stringContaining('1 draws')])
    const theirs = await (await site.client(stranger.email)).get(`/office/${organisation}`)
    expect(theirs.status).toBe(403)
    expect(theirs.text).toContain('You have no role in this organisation')
  })

  it('send strangers to the sign-in page, and back to where they wanted to go', async () => {
    const answer = await request(site.listener).get('/office/band?page=2')
    expect(answer.status).toBe(303)
    expect(answer.headers.location).toBe('/sign-in?next=%2Foffice%2Fband%3Fpage%3D2')
    expect(answer.headers['cache-control']).toBe('no-store')
  })

  it('that are refused know who is signed in and nothing else', async () => {
    const person = await site.person({ name: 'Ada Brandt' })
    const answer = await (await site.client(person.email)).get('/admin/organisations')
    expect(answer.status).toBe(403)
    expect(answer.text).toContain('administrator Ada Brandt refused: Only an administrator of the site can do this.')
  })

  it('pass on where they send people', async () => {
    const person = await site.person()
    const answer = await (await site.client(person.email)).get('/office/away')
    expect([answer.status, answer.headers.location]).toEqual([302, '/office'])
  })

  it('answer HEAD like GET, without a body', async () => {
    const answer = await request(site.listener).head('/draws/no-such-draw')
    expect([answer.status, answer.text]).toEqual([404, undefined])
  })
})

describe('kept pages', () => {
  it('are rendered once for a crowd, each answer with a nonce of its own', async () => {
    const { slug, drawId } = await makeDraft()
    await site.database.pool.query(`update draw set state = 'open', opened_at = now() where id = $1`, [drawId])
    await request(site.listener).get(`/draws/${slug}`)
    const before = renderings
    const answers = await Promise.all(
      Array.from({ length: 12 }, () => request(site.listener).get(`/draws/${slug}`).set('Accept-Encoding', 'gzip')),
    )
    expect(renderings - before).toBeLessThanOrEqual(1)
    const nonces = answers.map((answer) => {
      const nonce = /'nonce-([\w-]{22})'/.exec(String(answer.headers['content-security-policy']))?.[1]
      expect(answer.text).toBe(`<p>Spring draw is open</p><script nonce="${nonce}"></script>`)
      expect(answer.headers['x-content-type-options']).toBe('nosniff')
      return nonce
    })
    expect(new Set(nonces).size).toBe(12)
  })

  it('show a change at once that was made through this process', async () => {
    const { slug, drawId, promoter } = await makeDraft()
    const client = await site.client(promoter.email)
    expect((await request(site.listener).get(`/draws/${slug}`)).status).toBe(404)
    await client.post(`/api/office/draws/${drawId}/open`).send({ version: 1 }).expect(200)
    expect((await request(site.listener).get(`/draws/${slug}`)).text).toContain('Spring draw is open')
    const { version } = (await client.get(`/api/office/draws/${drawId}`)).body as { version: number }
    await client
      .post(`/api/office/draws/${drawId}/cancel`)
      .send({ version, reason: 'The hall is flooded.', title: 'Spring draw' })
      .expect(200)
    expect((await request(site.listener).get(`/draws/${slug}`)).text).toContain('Spring draw is cancelled')
  })

  it('show a change made elsewhere after a second', async () => {
    const { slug, drawId } = await makeDraft()
    await site.database.pool.query(`update draw set state = 'open', opened_at = now() where id = $1`, [drawId])
    expect((await request(site.listener).get(`/draws/${slug}`)).text).toContain('is open')
    await site.database.pool.query(`update draw set state = 'closed', closed_at = now() where id = $1`, [drawId])
    await new Promise((later) => setTimeout(later, 1100))
    expect((await request(site.listener).get(`/draws/${slug}`)).text).toContain('is closed')
  })

  it('hold nothing of somebody who is signed in', async () => {
    const { slug, drawId, promoter } = await makeDraft()
    await site.database.pool.query(`update draw set state = 'open', opened_at = now() where id = $1`, [drawId])
    const client = await site.client(promoter.email)
    const own = await client.get(`/draws/${slug}`)
    expect(own.headers['cache-control']).toBe('no-store')
    const strangers = await request(site.listener).get(`/draws/${slug}`)
    expect(strangers.headers['set-cookie']).toBeUndefined()
    expect(strangers.headers['cache-control']).toBe('private, no-cache')
  })

  it('are whole when they come compressed', async () => {
    await request(site.listener).get('/how-it-works')
    const packed = await request(site.listener)
      .get('/how-it-works')
      .set('Accept-Encoding', 'gzip')
      .buffer(true)
      .parse((response, done) => {
        const chunks: Buffer[] = []
        response.on('data', (chunk: Buffer) => chunks.push(chunk))
        response.on('end', () => done(null, Buffer.concat(chunks)))
      })
    expect(packed.headers['content-encoding']).toBe('gzip')
    const body = packed.body as Buffer
    const text = body[0] === 0x1f ? gunzipSync(body).toString() : body.toString()
    expect(text).toMatch(/^<p><\/p><script nonce="[\w-]{22}"><\/script>$/)
  })
})

describe('what a page may do', () => {
  it('is what the routes allow: the flags of a draw and the answers agree', async () => {
    const { drawId, organisationId, promoter } = await makeDraft()
    const organiser = await site.person()
    await site.member(organisationId, organiser.id, 'organiser')
    const may = async (email: string) =>
      getOfficeDraw.response.parse((await (await site.client(email)).get(`/api/office/draws/${drawId}`)).body).may
    expect(await may(promoter.email)).toMatchObject({ edit: true, open: true, cancel: true })
    expect(await may(organiser.email)).toMatchObject({ edit: true, open: false, cancel: false })
    const theirs = await site.client(organiser.email)
    await theirs.post(`/api/office/draws/${drawId}/open`).send({ version: 1 }).expect(403)
    await site.database.pool.query(`update organisation set state = 'suspended' where id = $1`, [organisationId])
    // A suspended organisation's drafts hide, from its own people too.
    await (await site.client(promoter.email)).get(`/api/office/draws/${drawId}`).expect(404)
    await (await site.client(promoter.email)).post(`/api/office/draws/${drawId}/open`).send({ version: 1 }).expect(403)
  })
})
