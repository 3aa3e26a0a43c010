import { createHash } from 'node:crypto'
import { eq } from 'drizzle-orm'
import { JSDOM } from 'jsdom'
import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { wrap } from '#server/http/pieces/card-svg.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { draw } from '#server/store/schema/draw.ts'
import { makeDraft, makeOffice, makeSealed, type Office, versionOf } from '#tests/support/draws.ts'
import { readQr } from '#tests/support/read-qr.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'

const clock = settableClock(new Date('2026-03-02T10:00:00Z'))
const TITLE = 'Hampers & <hams> for “all”'
let site: WebSite
let office: Office
let drawn: string
let sealed: string
let draft: string

beforeAll(async () => {
  site = await startWebSite({}, {}, clock)
  const { services } = site
  office = await makeOffice(services, { demo: true })
  const slugOf = async (id: string) =>
    (await services.db.select({ slug: draw.slug }).from(draw).where(eq(draw.id, id)))[0]?.slug as string
  const id = await makeSealed(services, office, { title: TITLE, drawAtDate: new Date('2026-03-02T12:00:00Z') })
  clock.set(new Date('2026-03-02T12:00:01Z'))
  await settleDraw(services, goOn, { draw: id })
  drawn = await slugOf(id)
  const later = { drawAtDate: new Date('2026-03-05T12:00:00Z') }
  sealed = await slugOf(await makeSealed(services, office, { ...later, title: 'Summer hamper draw' }))
  draft = await slugOf(await makeDraft(services, office, later))
  const over = await makeSealed(services, office, { ...later, title: 'Autumn draw' })
  await cancelDraw(services, office.promoter, {
    draw: over,
    version: await versionOf(services, over),
    title: 'Autumn draw',
    reason: 'The hall burnt down & <nobody> was hurt.',
  })
}, 60_000)
afterAll(() => site.close())

const get = (path: string) => request(site.listener).get(path)
const body = async (path: string) =>
  ((await get(path).responseType('blob').expect(200)).body as Buffer).toString('utf8')
const xml = (text: string) => {
  const { window } = new JSDOM('')
  const parsed = new window.DOMParser().parseFromString(text, 'application/xml')
  expect(parsed.querySelector('parsererror')?.textContent).toBeUndefined()
  return parsed
}
const labels = async () =>
  (await site.database.pool.query<{ label: string }>('select label from opened_label order by first_pick')).rows.map(
    ({ label }) => label,
  )

describe('the result card', () => {
  it('may be framed by anybody, runs nothing, and its policy lets its one style through', async () => {
    const answer = await get(`/embed/draws/${drawn}`).expect(200)
    const policy = String(answer.headers['content-security-policy'])
    expect(policy).toContain('frame-ancestors *')
    expect(policy).toContain("default-src 'none'")
    expect(policy).not.toMatch(/script-src|unsafe/)
    expect(answer.headers['x-frame-options']).toBeUndefined()
    const page = new JSDOM(answer.text).window.document
    expect(page.querySelector('script, [onclick], [style]')).toBeNull()
    const style = page.querySelector('style')?.textContent ?? ''
    expect(policy).toContain(`'sha256-${createHash('sha256').update(style).digest('base64')}'`)
    for (const path of ['/', `/draws/${drawn}`, `/draws/${drawn}/card.svg`, '/embed/draws/none-such']) {
      const other = await get(path)
      const refuses = /frame-ancestors 'none'/.test(String(other.headers['content-security-policy']))
      expect(refuses || other.headers['x-frame-options'] === 'DENY', path).toBe(true)
    }
  })

  it('names the winners in order, and the draw as typed', async () => {
    const page = new JSDOM(await body(`/embed/draws/${drawn}`)).window.document
    expect(page.querySelector('h1')?.textContent).toBe(TITLE)
    expect([...page.querySelectorAll('li b')].map((one) => one.textContent)).toEqual(await labels())
    expect(page.querySelector('li span')?.textContent).toBe('Hamper, 1 of 2')
    expect(page.querySelector('a')?.getAttribute('href')).toBe(`${site.origin}/draws/${drawn}`)
    expect(page.body.textContent).toContain('A demonstration')
    const { body: seal } = await get(`/api/v1/draws/${drawn}/seal`)
    expect(page.querySelector('code')?.textContent).toBe(`${seal.digest.slice(0, 8)} … ${seal.digest.slice(-8)}`)
    const waiting = new JSDOM(await body(`/embed/draws/${sealed}`)).window.document
    expect(waiting.querySelectorAll('li')).toHaveLength(0)
    expect(waiting.body.textContent).toContain('Sealed. To be drawn on Thursday, 5 March 2026, 12:00 (Europe/London).')
  })

  it('is also a picture: well-formed, without scripts, its words as text and in its name', async () => {
    const picture = xml(await body(`/draws/${drawn}/card.svg`))
    expect(picture.documentElement.localName).toBe('svg')
    expect(picture.querySelector('script, foreignObject, image, use, [href]')).toBeNull()
    const name = picture.querySelector('title')?.textContent ?? ''
    const written = [...picture.querySelectorAll('text')].map((one) => one.textContent).join(' ')
    for (const words of [TITLE, ...(await labels()), '4 entrants, 11 tickets']) {
      expect(name).toContain(words)
      expect(written).toContain(words)
    }
    // A bar for each coin of the first walk, and the winner's own.
    const { body: transcript } = await get(`/api/v1/draws/${drawn}/transcript`)
    expect(picture.querySelectorAll('.won')).toHaveLength(transcript.items[0].coins.length + 1)
  })

  it('of a label that was taken down says so', async () => {
    const [first] = await labels()
    await site.database.pool.query('delete from opened_label where first_pick = 0')
    for (const path of [`/embed/draws/${drawn}`, `/draws/${drawn}/card.svg`]) {
      const text = await body(path)
      expect(text).toContain('Name withheld')
      expect(text).not.toContain(first)
    }
  })

  it('there is none of a draft', async () => {
    for (const path of [`/embed/draws/${draft}`, `/draws/${draft}/card.svg`, `/draws/${draft}/qr.svg`]) {
      await get(path).expect(404)
    }
  })
})

describe('QR codes', () => {
  it('lead to the page of the draw and of the organisation', async () => {
    expect(readQr(xml(await body(`/draws/${drawn}/qr.svg`)))).toBe(`${site.origin}/draws/${drawn}`)
    const place = `/organisations/${office.organisation}`
    expect(readQr(xml(await body(`${place}/qr.svg`)))).toBe(`${site.origin}${place}`)
    await get('/organisations/none-such/qr.svg').expect(404)
  })
})

/** RFC 4287: sections 4.1.1, 4.1.2 and 4.2 (from memory). Tag URIs: RFC 4151 section 2.1. */
describe('the feed', () => {
  const TAG = /^tag:[a-z0-9.-]+,\d{4}-\d\d-\d\d:[a-z0-9/-]+$/
  const only = (parent: Element, name: string) => {
    const found = [...parent.children].filter((one) => one.localName === name)
    expect(found, name).toHaveLength(1)
    return found[0]?.textContent ?? ''
  }

  it('has what Atom asks for, newest first, with what people wrote kept whole', async () => {
    const answer = await get(`/organisations/${office.organisation}/feed.atom`).responseType('blob').expect(200)
    expect(answer.headers['content-type']).toBe('application/atom+xml; charset=utf-8')
    const feed = xml((answer.body as Buffer).toString()).documentElement
    expect([feed.localName, feed.namespaceURI]).toEqual(['feed', 'http://www.w3.org/2005/Atom'])
    expect(only(feed, 'id')).toMatch(TAG)
    expect(only(feed, 'title')).toBe('Draws of Quarry Lane Choir')
    expect([...feed.children].find((one) => one.localName === 'author')?.textContent).toBe('Quarry Lane Choir')
    const self = [...feed.children].find((one) => one.getAttribute('rel') === 'self')
    expect(self?.getAttribute('href')).toBe(`${site.origin}/organisations/${office.organisation}/feed.atom`)
    const entries = [...feed.children].filter((one) => one.localName === 'entry')
    expect(entries.map((entry) => only(entry, 'title'))).toEqual([
      'Cancelled: Autumn draw',
      'Sealed: Autumn draw',
      'Opened: Autumn draw',
      'Sealed: Summer hamper draw',
      'Opened: Summer hamper draw',
      `Drawn: ${TITLE}`,
      `Sealed: ${TITLE}`,
      `Opened: ${TITLE}`,
    ])
    const ids = entries.map((entry) => only(entry, 'id'))
    expect(new Set(ids).size).toBe(ids.length)
    for (const id of ids) expect(id).toMatch(TAG)
    const times = entries.map((entry) => only(entry, 'updated'))
    for (const time of times) expect(time).toMatch(/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ$/)
    expect(only(feed, 'updated')).toBe(times[0])
    expect(only(entries[0] as Element, 'content')).toContain('“The hall burnt down & <nobody> was hurt.”')
    for (const entry of entries) {
      const link = [...entry.children].find((one) => one.getAttribute('rel') === 'alternate')
      await get(String(link?.getAttribute('href')).replace(site.origin, '')).expect(200)
    }
    await get(`/organisations/${office.organisation}/feed.atom`)
      .set('If-None-Match', String(answer.headers.etag))
      .expect(304)
  })

  it('of an organisation without draws is a feed too; of none there is none', async () => {
    const { slug } = await site.organisation()
    const feed = xml(await body(`/organisations/${slug}/feed.atom`)).documentElement
    expect(only(feed, 'updated')).toMatch(/Z$/)
    const pending = await site.organisation('pending')
    await get(`/organisations/${pending.slug}/feed.atom`).expect(404)
  })
})

describe('lines of the picture', () => {
  it('break at spaces, inside words that are too long, and say where words were left out', () => {
    expect(wrap('Bells and ropes', 100, 3)).toEqual(['Bells and ropes'])
    expect(wrap('', 100, 3)).toEqual([])
    const broken = wrap('Bells and ropes', 6, 3)
    expect(broken.join(' ')).toBe('Bells and ropes')
    expect(broken.length).toBeGreaterThan(1)
    const long = wrap('W'.repeat(40), 10, 9)
    expect(long.join('')).toBe('W'.repeat(40))
    for (const line of long) expect(line.length).toBeLessThanOrEqual(10)
    const cut = wrap('one two three four five six seven eight nine ten', 8, 2)
    expect(cut).toHaveLength(2)
    expect(cut[1]).toMatch(/^\S.*…$/)
  })
})
