// @vitest-environment jsdom
import { act, cleanup, fireEvent, screen, waitFor, within } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { whyFixed } from '#src/features/office/entrants/list-words.ts'
import { wholeNumber } from '#src/features/office/entrants/entrant-fields.tsx'
import { entrantSearchFrom, entrantsHref, nextOrder } from '#src/features/office/entrants/search.ts'
import type { EntrantRow, OfficeDraw } from '#shared/schemas/api/office.ts'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { DRAW, DRAW_ID, entrant, entrantList, officeDraw, session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(cleanup)

const base = (draw: OfficeDraw = officeDraw()) => ({
  getSession: () => session(),
  getOfficeDraw: () => draw,
  listEntrants: () => entrantList(),
})
const type = (label: string, value: string) => fireEvent.change(screen.getByLabelText(label), { target: { value } })
const click = (name: string | RegExp) => fireEvent.click(screen.getByRole('button', { name }))
const field = (label: string) => screen.getByLabelText<HTMLInputElement>(label)

describe('the search of entrants', () => {
  it.each([
    ['', { q: '', sort: 'added', direction: 'up', page: 1 }],
    ['q= Trask &sort=-tickets&page=3', { q: 'Trask', sort: 'tickets', direction: 'down', page: 3 }],
    ['sort=height&page=0', { q: '', sort: 'added', direction: 'up', page: 1 }],
    ['page=two', { q: '', sort: 'added', direction: 'up', page: 1 }],
  ])('reads %j out of the address', (text, found) => {
    expect(entrantSearchFrom(new URLSearchParams(text))).toEqual(found)
  })

  it('writes an address that reads back as itself', () => {
    const search = { q: 'a & b', sort: 'label', direction: 'down', page: 20_000 } as const
    const href = entrantsHref('hall', DRAW_ID, search)
    expect(entrantSearchFrom(new URL(href, 'https://evenpenny.example').searchParams)).toEqual(search)
    expect(entrantsHref('hall', DRAW_ID, {})).toBe(`/office/hall/draws/${DRAW_ID}/entrants`)
  })

  it('turns a column round when it is in use, and begins tickets with the most', () => {
    expect(nextOrder({ sort: 'name', direction: 'up' }, 'name')).toEqual({ sort: 'name', direction: 'down' })
    expect(nextOrder({ sort: 'name', direction: 'down' }, 'name')).toEqual({ sort: 'name', direction: 'up' })
    expect(nextOrder({ sort: 'name', direction: 'down' }, 'tickets')).toEqual({ sort: 'tickets', direction: 'down' })
    expect(nextOrder({ sort: 'tickets', direction: 'down' }, 'code')).toEqual({ sort: 'code', direction: 'up' })
  })

  it.each([
    ['12', 12],
    ['1,250', 1250],
    ['1 250', 1250],
    ['12,50', Number.NaN],
    ['1.5', Number.NaN],
    ['-3', Number.NaN],
    ['l2', Number.NaN],
    ['', Number.NaN],
  ])('reads the typed count %j as %d', (text, count) => expect(wholeNumber(text)).toBe(count))
})

describe('whyFixed', () => {
  const fixed = (changes: Partial<OfficeDraw>) =>
    whyFixed(officeDraw({ ...changes, may: { ...officeDraw().may, changeEntrants: false } }))
  it('says nothing where the list can be changed', () => expect(whyFixed(officeDraw())).toBeNull())
  it.each([
    ['closed', /closed.*promoter can reopen/],
    ['sealed', /new seal, with a public reason, before the draw/],
    ['drawn', /stays as it was sealed/],
    ['cancelled', /cancelled/],
    ['failed', /failed/],
  ] as const)('says why in a draw that is %s', (state, words) => expect(fixed({ state })).toMatch(words))
  it('tells a suspended organisation from a reader', () => {
    const { organisation } = officeDraw()
    expect(fixed({ state: 'open', organisation: { ...organisation, state: 'suspended' } })).toMatch(/suspended/)
    expect(fixed({ state: 'open' })).toMatch(/organisers and promoters/)
  })
  it('sends an organiser with a draft to the opening, which comes before the first ticket', () => {
    expect(fixed({ state: 'draft' })).toMatch(/once the promoter has opened the draw.*before the first ticket/)
  })
})

describe('the page of the entrants', () => {
  it('asks the server for the search of the address and shows what it found, with its tickets', async () => {
    const api = fakeApi({
      ...base(),
      listEntrants: () => entrantList([entrant(1)], { total: 214_000, tickets: 1_932_000, page: 2 }),
    })
    await openPage(`${DRAW}/entrants?q=tra&sort=-tickets&page=2`, api)
    expect(api.of('listEntrants')[0]).toEqual({
      params: { draw: DRAW_ID },
      query: { q: 'tra', sort: 'tickets', direction: 'down', page: 2 },
    })
    expect(screen.getByText('214,000 entrants found, with 1,932,000 tickets.')).toBeDefined()
    expect(screen.getByRole('columnheader', { name: /^Tickets/ }).getAttribute('aria-sort')).toBe('descending')
    expect(screen.getByRole('columnheader', { name: /^Name/ }).hasAttribute('aria-sort')).toBe(false)
    const name = screen.getByRole('link', { name: /^Name/ })
    expect(name.getAttribute('href')).toBe(`${DRAW}/entrants?q=tra&sort=name`)
    expect(screen.getByRole('link', { name: 'Next page' }).getAttribute('href')).toContain('sort=-tickets&page=3')
  })

  it('leads from an empty list to the import', async () => {
    const draw = officeDraw({ counts: { entrants: 0, tickets: 0, withEmail: 0 } })
    await openPage(`${DRAW}/entrants`, fakeApi({ ...base(draw), listEntrants: () => entrantList([]) }))
    expect(screen.getByText('Nobody is in the list yet.')).toBeDefined()
    for (const link of screen.getAllByRole('link', { name: 'Bring in a sheet' })) {
      expect(link.getAttribute('href')).toBe(`${DRAW}/import`)
    }
  })

  it('says of a search without a hit that the list itself is not empty', async () => {
    await openPage(`${DRAW}/entrants?q=zz`, fakeApi({ ...base(), listEntrants: () => entrantList([]) }))
    expect(screen.getByText('No entrant fits.')).toBeDefined()
    expect(screen.getByRole('link', { name: 'Show the whole list' }).getAttribute('href')).toBe(`${DRAW}/entrants`)
  })

  it('offers no change in a closed list, says why, and still shows an entrant whole', async () => {
    await openPage(`${DRAW}/entrants`, fakeApi(base(officeDraw({ state: 'closed' }))))
    expect(screen.getByText(/^The list is closed/)).toBeDefined()
    expect(screen.queryByRole('button', { name: 'Add an entrant' })).toBeNull()
    click('Show Amadou Keita')
    expect(screen.getAllByText('01632 960177').length).toBeGreaterThan(0)
    expect(screen.queryByRole('button', { name: 'Save' })).toBeNull()
  })

  it('adds an entrant as typed and waits for the next', async () => {
    const added = entrant(1, { name: 'Zora Petty', tickets: 1250 })
    const api = fakeApi({ ...base(), addEntrant: () => added })
    await openPage(`${DRAW}/entrants`, api)
    click('Add an entrant')
    type('Name', ' Zora Petty ')
    type('Tickets', '1,250')
    await act(async () => click('Add to the list'))
    await waitFor(() => expect(screen.getByText('Added Zora Petty with 1,250 tickets.')).toBeDefined())
    expect(api.of('addEntrant')[0]).toEqual({
      params: { draw: DRAW_ID },
      body: { name: 'Zora Petty', tickets: 1250, label: '', email: '', phone: '', numbers: '' },
    })
    expect(field('Name').value).toBe('')
    expect(document.activeElement).toBe(field('Name'))
    // The list and the counts above are read anew.
    expect(api.of('listEntrants').length).toBe(2)
    expect(api.of('getOfficeDraw').length).toBe(2)
  })

  it('keeps what was typed when it is refused, and leads to the field', async () => {
    await openPage(`${DRAW}/entrants`, fakeApi(base()))
    click('Add an entrant')
    type('Name', 'Zora Petty')
    type('Tickets', 'l2')
    await act(async () => click('Add to the list'))
    const summary = await screen.findByRole('alert')
    expect(document.activeElement).toBe(summary)
    expect(within(summary).getByRole('link').getAttribute('href')).toBe('#tickets')
    expect(field('Tickets').getAttribute('aria-invalid')).toBe('true')
    expect(field('Name').value).toBe('Zora Petty')
    expect(field('Tickets').value).toBe('l2')
  })
})

describe('the panel of an entrant', () => {
  const theirs = entrant(1, { tickets: 9, email: 'new@otterford.example', version: 2 })

  /** A list in which somebody else has changed the first entrant by the time that one saves. */
  function contested() {
    return fakeApi({
      ...base(),
      listEntrants: ({ query }: { query: { q: string } }) => entrantList(query.q === '' ? undefined : [theirs]),
      updateEntrant: ({ body }: { body: EntrantRow }) =>
        body.version === 2
          ? { ...theirs, ...body, label: 'x' }
          : Promise.reject(refusal(409, 'Changed.', { code: 'changed' })),
    })
  }
  async function collide(api: ReturnType<typeof contested>) {
    await openPage(`${DRAW}/entrants`, api)
    click('Change Lowenna Trask')
    type('Tickets', '6')
    await act(async () => click('Save'))
    await screen.findByText('Somebody changed this entrant meanwhile')
    await screen.findByText(/tickets 9 \(before: 4\)/)
  }

  it('keeps what was typed when somebody else was faster, and saves it over theirs when told to', async () => {
    const api = contested()
    await collide(api)
    expect(field('Tickets').value).toBe('6')
    expect(api.of('listEntrants').at(-1)).toMatchObject({ query: { q: 'K7M2P9XR01' } })
    await act(async () => click('Save what I typed over it'))
    await waitFor(() => expect(screen.queryByLabelText('Tickets')).toBeNull())
    const sent = api.of('updateEntrant').map(({ body }) => body as EntrantRow)
    // Their new address was not typed over here, so it stays.
    expect(sent.map(({ version, tickets, email }) => [version, tickets, email])).toEqual([
      [1, 6, 'entrant1@otterford.example'],
      [2, 6, 'new@otterford.example'],
    ])
    expect(document.activeElement).toBe(screen.getByRole('button', { name: 'Change Lowenna Trask' }))
  })

  it('shows what is there now when told to', async () => {
    const api = contested()
    await collide(api)
    await act(async () => click('Show what is there now'))
    expect(field('Tickets').value).toBe('9')
    expect(field('E-mail address, if any').value).toBe('new@otterford.example')
    await act(async () => click('Save'))
    await waitFor(() => expect(api.of('updateEntrant').at(-1)).toMatchObject({ body: { version: 2, tickets: 9 } }))
  })

  it('says that a refused change is not one by somebody else', async () => {
    const api = fakeApi({
      ...base(),
      updateEntrant: () => Promise.reject(refusal(409, 'The list is closed.', { code: 'refused' })),
    })
    await openPage(`${DRAW}/entrants`, api)
    click('Change Lowenna Trask')
    await act(async () => click('Save'))
    await screen.findByText('The list is closed.')
    expect(screen.queryByRole('button', { name: 'Save what I typed over it' })).toBeNull()
  })

  it('does not leave words unsaved for another row', async () => {
    await openPage(`${DRAW}/entrants`, fakeApi(base()))
    click('Change Lowenna Trask')
    type('Name', 'Lowenna Trask-Hale')
    click('Change Amadou Keita')
    expect(screen.getByText('What you typed here is not saved')).toBeDefined()
    expect(field('Name').value).toBe('Lowenna Trask-Hale')
    click('Cancel')
    click('Change Amadou Keita')
    expect(field('Name').value).toBe('Amadou Keita')
  })

  it('takes nobody out without a reason, and then with it', async () => {
    const api = fakeApi({ ...base(), removeEntrant: () => ({}) })
    await openPage(`${DRAW}/entrants`, api)
    click('Change Birgit Solberg')
    click('Take out of the list')
    await act(async () => click('Take out'))
    await screen.findAllByText('Say why this entrant leaves the list.')
    expect(api.of('removeEntrant')).toEqual([])
    type('Reason', 'Asked for her money back.')
    await act(async () => click('Take out'))
    await screen.findByText('Taken out: Birgit Solberg, 5 tickets.')
    expect(document.activeElement).not.toBe(document.body)
    expect(api.of('removeEntrant')).toEqual([
      { params: { draw: DRAW_ID, entrant: '3' }, body: { reason: 'Asked for her money back.' } },
    ])
  })
})
