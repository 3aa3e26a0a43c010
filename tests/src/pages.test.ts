import { JSDOM } from 'jsdom'
import { describe, expect, it } from 'vitest'
import { escapeJson } from '#src/app/state.ts'
import { render } from '#src/entry/server.tsx'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { fixtureClient, oddsOf } from '#tests/support/public-pages/fixture-client.ts'
import {
  allDraws,
  drawnDraw,
  hex,
  openDraw,
  organisationPage,
  sealedDraw,
} from '#tests/support/public-pages/fixtures.ts'

const ORIGIN = 'https://draws.example'

async function get(path: string, api: ApiClient = fixtureClient()) {
  const errors: unknown[] = []
  const page = await render(new Request(ORIGIN + path), {
    api,
    nonce: 'Zm9yIHRoZSB0ZXN0cyBvbg',
    assets: { scripts: ['/assets/client.js'], styles: ['/assets/client.css'], preload: [] },
    origin: ORIGIN,
    now: '2026-06-17T17:04:00Z',
    onError: (error) => errors.push(error),
  })
  if (page instanceof Response) throw new Error(`sent to ${page.headers.get('location')}`)
  const html = await new Promise<string>((resolve) => page.pipe({ end: resolve } as unknown as NodeJS.WritableStream))
  const { document } = new JSDOM(html).window
  const text = (selector: string) => document.querySelector(selector)?.textContent?.replace(/\s+/g, ' ').trim() ?? ''
  return { status: page.status, html, document, text, main: text('main'), errors }
}

const PATHS = [
  '/',
  '/draws',
  '/draws?q=bell&state=drawn',
  '/organisations',
  '/organisations/larkmoor-bells',
  '/how-it-works',
  '/developers',
  '/log',
  '/log?page=2',
  '/log?at=17',
  ...allDraws().flatMap((draw) => [`/draws/${draw.slug}`, `/draws/${draw.slug}/check`, `/draws/${draw.slug}/hall`]),
  '/draws/bell-ropes-2026/picks/0',
  '/draws/bell-ropes-2026/picks/7',
  '/draws/quillby-fair-2026/picks/12',
  '/draws/tiny-2026/picks/2',
  '/draws/steep-2026/picks/0',
]

describe.each(PATHS)('%s', (path) => {
  it('is a whole page without JavaScript, with its head, one h1 and nothing from elsewhere', async () => {
    const { status, html, document, main, errors } = await get(path)
    expect(errors).toEqual([])
    expect(status).toBe(200)
    expect(html.startsWith('<!DOCTYPE html>')).toBe(true)
    expect(document.documentElement.lang).toBe('en-GB')
    expect(document.title).toMatch(/Evenpenny/)
    expect(document.querySelectorAll('head title')).toHaveLength(1)
    expect(document.querySelector('head meta[name=description]')?.getAttribute('content')?.length).toBeGreaterThan(40)
    expect(document.querySelector('head meta[property="og:image"]')?.getAttribute('content')).toBe(`${ORIGIN}/card.png`)
    expect(document.querySelectorAll('h1')).toHaveLength(1)
    expect(main.length).toBeGreaterThan(60)
    expect(main).not.toMatch(/undefined|NaN|\[object|Infinity/)
    const headings = [...document.querySelectorAll('h1,h2,h3')].map((heading) => Number(heading.tagName[1]))
    headings.forEach((level, index) => expect(level).toBeLessThanOrEqual((headings[index - 1] ?? 0) + 1))
    for (const element of document.querySelectorAll('[src],link[href]')) {
      const address = element.getAttribute('src') ?? element.getAttribute('href') ?? ''
      expect(address.startsWith('/') || address.startsWith(ORIGIN)).toBe(true)
    }
  })
  it('has no inline style and no script that the policy would stop', async () => {
    const { document } = await get(path)
    expect(document.querySelectorAll('[style],style').length).toBe(0)
    for (const script of document.querySelectorAll('script:not([type="application/json"])')) {
      expect(script.getAttribute('nonce')).toBe('Zm9yIHRoZSB0ZXN0cyBvbg')
    }
  })
  it('names every id once and links nowhere empty', async () => {
    const { document } = await get(path)
    const ids = [...document.querySelectorAll('[id]')].map((element) => element.id)
    expect(new Set(ids).size).toBe(ids.length)
    for (const link of document.querySelectorAll('a')) {
      const href = link.getAttribute('href') ?? ''
      if (href.startsWith('#')) expect(document.getElementById(href.slice(1))).not.toBeNull()
      else expect(href).toMatch(/^\/|^https:/)
      expect((link.textContent ?? '') + (link.getAttribute('aria-label') ?? '')).not.toBe('')
    }
  })
})

describe('a draw’s page', () => {
  it('open: how to enter, price, prizes, terms, and the odds of tickets added now', async () => {
    const { main, text, document } = await get('/draws/open-2026')
    expect(text('h1')).toBe('Ringers’ Autumn Draw')
    expect(text('.lead')).toBe(
      'Entries are open until Tuesday 16 June 2026 at 12:00. Five prizes will be drawn on Friday 19 June 2026 at 19:30.',
    )
    expect(main).toContain(
      'Tickets come from the promoter, not from this site: Hester Vane, 3 Tower Cottages, Larkmoor. A ticket costs £2.',
    )
    expect(main).toContain('A month of bread from Sennow Mill, three of them')
    expect(main).toContain('One ticket costs £2.')
    // Twelve entrants hold 69 tickets in the fixture; nobody learns who holds what.
    expect(main).toContain('So far the list holds 69 tickets.')
    const rows = [...document.querySelectorAll('.odds-table tbody tr')].map((row) => row.children[1]?.textContent)
    expect(rows[0]).toBe('1 in 70 (1/70, 1.43\u00a0%)')
    expect(rows[1]).toBe('about 1 in 15 (5/74, 6.76\u00a0%)')
    expect(main).not.toContain('sealed list')
    expect(document.querySelector('link[rel=canonical]')?.getAttribute('href')).toBe(`${ORIGIN}/draws/open-2026`)
  })
  it('sealed: countdown in figures, whole seal, what it fixes, exact odds of each number of tickets', async () => {
    const { main, document, text } = await get('/draws/sealed-2026')
    const total = sealedDraw().seal?.tickets ?? 0
    expect(text('.count')).toBe('2 days 1 hour 26 minutes')
    expect(main.replace(/\s/g, '')).toContain(hex('seal'))
    const rows = [...document.querySelectorAll('.odds-table tbody tr')].map((row) =>
      [...row.children].map((cell) => cell.textContent),
    )
    const { rows: odds } = oddsOf(sealedDraw())
    expect(rows.map((row) => row[0])).toEqual(odds.map(({ tickets }) => `${tickets} ticket${tickets === 1 ? '' : 's'}`))
    expect(rows[0]?.[1]).toBe(`1 in ${total} (1/${total}, ${((1 / total) * 100).toFixed(3)}\u00a0%)`)
    expect(rows[0]?.[2]).toContain(odds[0]?.prize.decimal)
    // One bar a row, the last as wide as there is room.
    const bars = [...document.querySelectorAll('.odds-chart rect')].map((bar) => bar.getAttribute('width'))
    expect([bars.length, bars.at(-1)]).toEqual([odds.length, '100.00%'])
    expect(main).toContain('It does not exist yet, and nobody can choose it.')
    const least = [odds[0], odds[(odds.length - 1) >> 1], odds.at(-1)]
    expect(document.querySelectorAll('.waffle .dot-in')).toHaveLength(
      least.reduce((sum, row) => sum + (row?.tickets ?? 0), 0),
    )
    expect(main).not.toContain('Who won')
  })
  it('sealed: answers for a number of tickets without JavaScript, says where nobody holds as many, and refuses junk', async () => {
    const { document, main } = await get('/draws/sealed-2026?tickets=1000')
    const total = sealedDraw().seal?.tickets ?? 0
    const asked = oddsOf(sealedDraw(), 1000).asked
    expect(document.querySelector<HTMLInputElement>('form.odds-form input')?.value).toBe('1000')
    expect(main).toContain(`1,000 tickets of the ${(total + 1000).toLocaleString('en-GB')} in.`)
    expect(main).toContain(asked?.prize.decimal)
    expect(main).toContain('Nobody in the sealed list holds 1,000 tickets.')
    const wrong = await get('/draws/sealed-2026?tickets=1.5')
    expect(wrong.status).toBe(200)
    expect(wrong.text('.odds-form .fault')).toBe('Error: Type a whole number from 1 to 4,294,967,295.')
    expect(wrong.main).not.toContain('Nobody in the sealed list')
  })
  it('stands without its odds where they fail', async () => {
    const api = fixtureClient()
    const failing: ApiClient = {
      call: (endpoint, input) =>
        endpoint.name === 'getDrawOdds' ? Promise.reject(new Error('out of order')) : api.call(endpoint, input),
    }
    const { status, main } = await get('/draws/sealed-2026', failing)
    expect(status).toBe(200)
    expect(main).toContain('What it fixes')
    expect(main).not.toContain('If you hold')
  })
  it('past its time: says what it waits for, and that nothing else may stand in', async () => {
    const { main } = await get('/draws/waiting-2026')
    expect(main).toContain(
      'no relay of the beacon can be reached. The draw waits for round 29,702,411: nothing else may stand in.',
    )
  })
  it('drawn: winners with exact chances and ladders; reserves without names', async () => {
    const draw = drawnDraw()
    const { document, main, html } = await get('/draws/bell-ropes-2026')
    const picks = draw.result?.picks ?? []
    const rows = [...document.querySelectorAll('.winners > li')]
    expect(rows).toHaveLength(5)
    rows.forEach((row, index) => {
      const pick = picks[index]
      expect(row.querySelector('.who')?.textContent).toBe(pick?.label)
      expect(row.textContent).toContain(`(${pick?.ticketsIn}/${pick?.remaining})`)
      expect(row.querySelectorAll('.mini .won').length).toBe((pick?.coins.length ?? 0) + 1)
      expect(row.querySelector('a')?.getAttribute('href')).toBe(`/draws/bell-ropes-2026/picks/${index}`)
    })
    expect(main).toContain('Reserve 1')
    expect(main).toContain('Named when called')
    expect(html).toContain('download')
    expect(main).toContain(`--key ${draw.seal?.keyFingerprint}`)
    expect(main).not.toContain('--test-beacon')
    expect(main).toContain('No check can show that every ticket sold was entered.')
    expect(main).toContain('I tossed every coin again on my own computer.')
  })
  it('withheld names are said to be withheld', async () => {
    const draw = drawnDraw()
    const picks = (draw.result?.picks ?? []).map((pick, index) =>
      index === 1 ? { ...pick, label: null, labelState: 'withheld' as const } : pick,
    )
    const { document } = await get(
      '/draws/bell-ropes-2026',
      fixtureClient([{ ...draw, result: draw.result && { ...draw.result, picks } }]),
    )
    expect([...document.querySelectorAll('.who')].map((name) => name.textContent)[1]).toBe('Name withheld')
  })
  it('of thousands: twenty winners large, the others in a table, counts instead of stacks', async () => {
    const { document, main } = await get('/draws/quillby-fair-2026')
    expect(document.querySelectorAll('.winners > li')).toHaveLength(20)
    expect(document.querySelectorAll('.winners ~ div table tbody tr')).toHaveLength(180)
    expect(main).toContain('The first 200 of 246 picks are on this page.')
    expect(document.querySelectorAll('.flip-bars li').length).toBeGreaterThan(2)
  })
  it('cancelled and failed: the reason in public words, no result, no countdown', async () => {
    const cancelled = await get('/draws/cancelled-2026')
    expect(cancelled.main).toContain('The hall burned down and the prizes with it. Every ticket is refunded.')
    expect(cancelled.document.querySelector('.count')).toBeNull()
    const failed = await get('/draws/failed-2026')
    expect(failed.main).toContain('could not be shown within seven days of its time')
    expect(failed.document.querySelector('.winners')).toBeNull()
  })
  it('corrected: both seals, the reason, the dates', async () => {
    const { main } = await get('/draws/corrected-2026')
    expect(main).toContain('the draw moved from Wednesday 17 June 2026 at 19:30 to Friday 19 June 2026 at 19:30')
    expect(main).toContain('Stub book 9 had not been entered when the list was sealed.')
    expect(main).toContain('Earlier seals')
  })
  it('demonstration, development chain, suspended organisation: said at the top, and in the command', async () => {
    const { main, document } = await get('/draws/demo-2026')
    const notices = document.querySelector('.notices')?.textContent ?? ''
    expect(notices).toContain('A demonstration')
    expect(notices).toContain('anyone could have foretold this result')
    expect(notices).toContain('is suspended')
    expect(main).toContain('--test-beacon')
  })
  it('always shows the cautions, and never says that a draw is lawful', async () => {
    for (const draw of allDraws()) {
      const { main } = await get(`/draws/${draw.slug}`)
      expect(main).toContain('A draw with paid tickets is a lottery in many places')
      expect(main).toContain('Evenpenny does not say that this one is lawful.')
    }
    const free = await get('/draws/free', fixtureClient([openDraw({ slug: 'free', ticketPrice: null })]))
    expect(free.main).toContain('A free draw has rules in many places too.')
  })
})

describe('a pick’s page', () => {
  it('shows each coin in words and multiplies the chances to the exact figure', async () => {
    const pick = drawnDraw().result?.picks[0]
    const { document, main, text } = await get('/draws/bell-ropes-2026/picks/0')
    expect(text('h1')).toBe('How the first prize found its winner')
    expect(document.querySelectorAll('.coin-row')).toHaveLength((pick?.coins.length ?? 0) + 1)
    const product = text('.product').replace(/ /g, '')
    expect(product.endsWith(`=${pick?.ticketsIn}/${pick?.remaining}`)).toBe(true)
    expect(main).toContain(
      pick?.coins
        .map((coin) => coin[2])
        .filter(Boolean)
        .join(' '),
    )
    const bars = [...document.querySelectorAll('.bar')]
    bars.forEach((bar, index) => {
      const coin = pick?.coins[index]
      if (!coin) throw new Error('one bar a coin')
      const share = Number.parseFloat(bar.querySelector('rect.h')?.getAttribute('width') ?? '')
      expect(share).toBeCloseTo((coin[0] / (coin[0] + coin[1])) * 100, 2)
      expect(bar.querySelector('rect.won')?.classList.contains(coin[3] === 'H' ? 'h' : 't')).toBe(true)
    })
    const flips = [...document.querySelectorAll('.ladder .rungs')].map((rungs) =>
      [...rungs.querySelectorAll('.flip')].map((flip) => flip.textContent).join(''),
    )
    expect(flips).toEqual(pick?.coins.map((coin) => coin[2]).filter(Boolean))
  })
  it('keeps 3 px for slivers and says a figure that does not fit', async () => {
    const { document } = await get('/draws/steep-2026/picks/0')
    const first = document.querySelector('.bar')
    expect(first?.querySelector('rect.least')?.getAttribute('width')).toBe('3')
    expect(document.querySelector('.panel')?.textContent).toContain('3 on the left.')
    expect(document.body.textContent).toContain('Nobody is left on the left side, so this coin takes no flip.')
  })
})

describe('the page of a suspended organisation', () => {
  it('says since when and why, in the words of the site', async () => {
    const suspension = { at: '2026-05-04T09:00:00Z', reason: 'Prizes of two draws were not handed over.' }
    const fixture = fixtureClient()
    const api = {
      call: (endpoint: { readonly name: string }, input: never) =>
        endpoint.name === 'getOrganisation'
          ? Promise.resolve({ ...organisationPage(), suspended: true, suspension })
          : fixture.call(endpoint as never, input),
    } as ApiClient
    const { main } = await get('/organisations/larkmoor-bells', api)
    expect(main).toContain('Since 4 May 2026. The site says why: “Prizes of two draws were not handed over.”')
    expect((await get('/organisations/larkmoor-bells')).main).not.toContain('The site says why')
  })
})

describe('addresses that lead nowhere', () => {
  it.each([
    '/nothing',
    '/draws/no-such-draw',
    '/draws/bell-ropes-2026/picks/900',
    '/draws/bell-ropes-2026/picks/first',
    '/organisations/nobody',
    '/office/quarry-lane/no/such/page',
  ])('%s answers 404 with a page that says what to do', async (path) => {
    const { status, text, main, document } = await get(path)
    expect(status).toBe(404)
    expect(text('h1')).toBe('There is no such page')
    expect(main).toContain('Search the draws')
    expect(document.querySelector('meta[name=robots]')?.getAttribute('content')).toBe('noindex')
    expect(document.querySelector('link[rel=canonical]')).toBeNull()
  })
  it('a failure inside answers 500, is reported, and shows nothing of itself', async () => {
    const broken: ApiClient = { call: () => Promise.reject(new Error('secret of the database')) }
    const { status, html, errors, text } = await get('/draws/bell-ropes-2026', broken)
    expect(status).toBe(500)
    expect(errors.length).toBeGreaterThan(0)
    expect(html).not.toContain('secret of the database')
    expect(text('h1')).toBe('Something went wrong')
  })
})

describe('the state for the browser', () => {
  it('holds no character that means anything to an HTML or old JavaScript parser', () => {
    const value = { words: '<!--</script ><script>&amp;\u2028\u2029' }
    expect(escapeJson(value)).not.toMatch(/[<>&\u2028\u2029]/)
    expect(JSON.parse(escapeJson(value))).toEqual(value)
  })
  it('cannot be broken out of by anybody’s words', async () => {
    const nasty = '</script ><script>alert(1)</script><!-- <script \u2028'
    const draw = openDraw({ slug: 'nasty', title: nasty, terms: nasty, goodCause: nasty })
    const { document, html } = await get('/draws/nasty', fixtureClient([draw]))
    expect(document.querySelectorAll('script:not([src]):not([type="application/json"])')).toHaveLength(0)
    expect(html).not.toContain('<script>alert')
    const state = JSON.parse(document.getElementById('evenpenny-state')?.textContent ?? '') as {
      query: { queries: { state: { data: { title: string } } }[] }
    }
    expect(state.query.queries[0]?.state.data.title).toBe(nasty)
  })
  it('is put in its place even where a page quotes the placeholder', async () => {
    const draw = openDraw({ slug: 'quoting', title: 'state of Zm9yIHRoZSB0ZXN0cyBvbg' })
    const { document, text } = await get('/draws/quoting', fixtureClient([draw]))
    expect(text('h1')).toBe('state of Zm9yIHRoZSB0ZXN0cyBvbg')
    expect(() => JSON.parse(document.getElementById('evenpenny-state')?.textContent ?? '') as unknown).not.toThrow()
  })
})

describe('how it works', () => {
  it('says whether the place in the list mattered, and how little a few draws can show', async () => {
    const { main } = await get('/how-it-works')
    expect(main).toContain('12 draws with 140 picks: on average 48.6 % of the way down.')
    expect(main).toContain('in about 56 of 100 cases (z = −0.59, p = 0.5552). That is nothing out of the ordinary.')
    expect(main).toContain('With so few picks only a gross lean could show.')
  })
  it('calls a lean out, and says nothing of few picks where there are many', async () => {
    const api = fixtureClient()
    const order = { mean: 0.56, z: 3.95, p: 0.0000775 }
    const leaning: ApiClient = {
      call: (endpoint, input) =>
        endpoint.name === 'getStatistics'
          ? Promise.resolve({ at: '2026-06-17T17:00:00Z', draws: 300, picks: 5000, order } as never)
          : api.call(endpoint, input),
    }
    const { main } = await get('/how-it-works', leaning)
    expect(main).toContain('less than once in 1,000 cases')
    expect(main).toContain('whoever runs this site has to look into it')
    expect(main).not.toContain('With so few picks')
  })
})
