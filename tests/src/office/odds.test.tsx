// @vitest-environment jsdom
import { cleanup, fireEvent, screen, waitFor, within } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { presentOdds } from '#server/store/queries/present-odds.ts'
import { chosenCounts } from '#shared/odds/chosen-counts.ts'
import { runOdds } from '#shared/odds/odds.ts'
import { listOfCounts } from '#shared/odds/ticket-groups.ts'
import type { OddsView } from '#shared/schemas/api/odds.ts'
import { fakeApi } from '#tests/support/office/fake-api.ts'
import { DRAW, officeDraw, session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(cleanup)

type Asked = Readonly<Record<string, number | undefined>>

/** Answers as the server does, over a list of 19 tickets or the one that is expected. */
function oddsOf(query: Asked): OddsView {
  const { tickets: asked, prizes = 1, entrants, allTickets } = query
  const expected = entrants !== undefined && allTickets !== undefined
  const list = listOfCounts(expected ? new Array<number>(entrants).fill(allTickets / entrants) : [12, 5, 2])
  const terms = { rule: 'one-prize-each', prizes, reserves: 0 } as const
  const basis = expected ? ('expected' as const) : ('present' as const)
  const about = { basis, entrants: list.entrants, tickets: list.tickets, ...terms }
  return presentOdds(about, runOdds(list, terms), { chosen: expected ? () => [1, 5, 20] : chosenCounts, asked })
}
const answers = (draw: ReturnType<typeof officeDraw>, role: 'promoter' | 'organiser' | 'witness' = 'organiser') =>
  fakeApi({
    getSession: () => session(role),
    getOfficeDraw: () => draw,
    getOfficeOdds: ({ query }) => oddsOf(query),
  })
const section = async () => (await screen.findByRole('heading', { name: 'What tickets give' })).closest('section')!
const cells = (within: HTMLElement) =>
  [...within.querySelectorAll('.odds-table tbody tr')].map((row) => [...row.children].map((cell) => cell.textContent))

describe('the odds while prizes are set', () => {
  const draft = officeDraw({ state: 'draft', counts: { entrants: 0, tickets: 0, withEmail: 0 } })
  it('are those of the list that is expected, and follow what is typed', async () => {
    const api = answers(draft)
    await openPage(`${DRAW}/prizes`, api)
    const part = await section()
    await within(part).findByText(/100 entrants with 300 tickets/)
    expect(cells(part)[0]?.slice(0, 2)).toEqual(['1 ticket', '1 in 301 (1/301, 0.332\u00a0%)'])
    fireEvent.change(screen.getByLabelText('Tickets in all'), { target: { value: '1000' } })
    await within(part).findByText(/100 entrants with 1,000 tickets/)
    expect(cells(part)[0]?.[1]).toContain('1 in 1,001 (1/1001')
    fireEvent.change(screen.getByLabelText('Entrants expected'), { target: { value: 'many' } })
    await within(part).findByText('Type a whole number from 1.')
  })
  it('count the items as they are typed, before they are saved', async () => {
    const api = answers(draft)
    await openPage(`${DRAW}/prizes`, api)
    const part = await section()
    // One weekend and four hampers; then four of each.
    await waitFor(() => expect(part.textContent).toContain('Any of the 5 prizes'))
    fireEvent.change(screen.getAllByLabelText(/How many/)[0] as HTMLElement, { target: { value: '4' } })
    await waitFor(() => expect(part.textContent).toContain('Any of the 8 prizes'))
    expect(api.of('putPrizes')).toEqual([])
  })
})

describe('the odds of a list that is there', () => {
  const open = officeDraw({
    state: 'open',
    may: { ...officeDraw().may, edit: false },
    counts: { entrants: 3, tickets: 19, withEmail: 3 },
  })
  it('show each number of tickets with its entrants, and answer for another', async () => {
    await openPage(`${DRAW}/prizes`, answers(open))
    const part = await section()
    await within(part).findByText(/3 entrants with 19 tickets/)
    expect(cells(part).map((row) => row.slice(0, 2))).toEqual([
      ['2 tickets', '1'],
      ['5 tickets', '1'],
      ['12 tickets', '1'],
    ])
    expect(cells(part)[2]?.[2]).toBe('about 1 in 1.6 (12/19, 63.2\u00a0%)')
    fireEvent.change(screen.getByLabelText('How many tickets?'), { target: { value: '1' } })
    expect((await within(part).findByText(/1 ticket of the 20 in/)).textContent).toBeTruthy()
    expect(part.textContent).toContain('Nobody in the list holds 1: the odds of one more entrant with as many.')
  })
  it('are not asked for by a witness, who may not read the list', async () => {
    const api = answers(open, 'witness')
    await openPage(`${DRAW}/prizes`, api)
    await screen.findByRole('heading', { name: 'Prizes' })
    expect(api.of('getOfficeOdds')).toEqual([])
  })
})
