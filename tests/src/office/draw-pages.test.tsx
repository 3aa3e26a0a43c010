// @vitest-environment jsdom
import { act, cleanup, fireEvent, screen, waitFor, within } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { drawFault } from '#src/features/office/draw/draw-fields.tsx'
import { hasSpoken } from '#src/features/office/draw/witness-part.tsx'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { DIGEST, DRAW, DRAW_ID, ME, officeDraw, people, session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(cleanup)

const RESULT = 'a7'.repeat(32)
const summary = {
  entrants: 3,
  tickets: 19,
  withoutEmail: 1,
  prizes: [{ id: 'p1', name: 'A weekend on a narrowboat', quantity: 1 }],
  items: 1,
  reserves: 3,
  rule: 'one-prize-each',
  drawAt: '2026-10-03T19:00:00Z',
  beacon: { round: 24_900_000, at: '2026-10-03T19:00:00Z', network: 'quicknet' },
  keyFingerprint: DIGEST,
  termsDigest: DIGEST,
  problems: [] as string[],
  cautions: [],
  replaces: null,
}

describe('a seal that waits for its timestamp', () => {
  const sealing = {
    replaces: null,
    drawAt: '2026-10-03T19:00:00Z',
    madeAt: '2026-10-02T18:00:00Z',
    tries: 3,
    triedAt: '2026-10-02T18:00:20Z',
    detail: 'https://timestamps.example: It did not answer within 10 s.',
    until: '2026-10-03T18:59:30Z',
  }
  const base = { getSession: () => session(), getSealSummary: () => summary }
  it('is told with what it waits for and until when, and there is nothing to seal', async () => {
    const api = fakeApi({ ...base, getOfficeDraw: () => officeDraw({ state: 'closed', sealing }) })
    await openPage(`${DRAW}/seal`, api)
    const told = (await screen.findByText('The list is being sealed')).closest('.notice')
    expect(told?.textContent).toContain('as soon as an outside authority has put a timestamp on it')
    expect(told?.textContent).toMatch(/3 tries so far gave no timestamp.*until Saturday 3 October 2026 at 19:59:30/)
    expect(told?.textContent).toContain('It did not answer within 10 s.')
    expect(screen.queryByRole('button', { name: 'Seal the list' })).toBeNull()
  })
  it('says nothing of tries while the first one is under way, and that the old seal stands where there is one', async () => {
    const waiting = { ...sealing, tries: 0, triedAt: null, detail: '', replaces: DIGEST }
    const draw = officeDraw({ state: 'sealed', sealDigest: DIGEST, sealedAt: '2026-10-02T17:00:00Z', sealing: waiting })
    await openPage(`${DRAW}/seal`, fakeApi({ ...base, getOfficeDraw: () => draw }))
    const told = (await screen.findByText('The new seal is being made')).closest('.notice')
    expect(told?.textContent).toContain('Until then the seal before it stands')
    expect(told?.textContent).not.toContain('tries')
  })
  it('leaves the promoter free to choose another course, which discards it', async () => {
    const draw = officeDraw({ state: 'closed', sealing, may: { ...officeDraw().may, reopen: true, cancel: true } })
    await openPage(DRAW, fakeApi({ ...base, getOfficeDraw: () => draw }))
    expect(await screen.findByText('Whatever you choose here discards the seal that waits.')).toBeDefined()
    expect(screen.getByRole('button', { name: 'Cancel the draw' })).toBeDefined()
    expect(screen.getByText('The list is being sealed. There is nothing to do meanwhile.')).toBeDefined()
  })
})

describe('sealing', () => {
  const closed = officeDraw({ state: 'closed' })
  const sealed = officeDraw({ state: 'sealed', sealDigest: DIGEST, sealedAt: '2026-10-02T18:00:00Z' })
  const base = { getSession: () => session(), getOfficeDraw: () => closed, getSealSummary: () => summary }
  const seal = () => act(async () => fireEvent.click(screen.getByRole('button', { name: 'Seal the list' })))

  it('asks for the tick, then seals exactly what was shown, and keeps the reader in the page', async () => {
    let done = false
    const api = fakeApi({
      ...base,
      getOfficeDraw: () => (done ? sealed : closed),
      sealDraw: () => {
        done = true
        return sealed
      },
    })
    await openPage(`${DRAW}/seal`, api)
    await seal()
    expect(document.activeElement).toBe(await screen.findByRole('alert'))
    expect(api.of('sealDraw')).toEqual([])
    fireEvent.click(screen.getByRole('checkbox'))
    await seal()
    await screen.findByText(/^The list is sealed/)
    expect(api.of('sealDraw')).toEqual([
      { params: { draw: DRAW_ID }, body: { version: 4, entrants: 3, tickets: 19, confirmed: true } },
    ])
    expect(document.activeElement).toBe(document.getElementById('main'))
  })

  it('says that the list changed meanwhile', async () => {
    const detail = 'The list has 4 entrants by now, not 3. Look through it again.'
    await openPage(`${DRAW}/seal`, fakeApi({ ...base, sealDraw: () => Promise.reject(refusal(409, detail)) }))
    fireEvent.click(screen.getByRole('checkbox'))
    await seal()
    await screen.findByText(detail)
    expect(screen.queryByText(/^The list is sealed/)).toBeNull()
  })

  it('tells what stands in the way and seals nothing', async () => {
    const draw = { ...closed, may: { ...closed.may, seal: false } }
    const problems = ['The draw time has passed. Postpone the draw first.']
    const api = fakeApi({
      ...base,
      getOfficeDraw: () => draw,
      getSealSummary: () => ({ ...summary, problems }),
      sealDraw: () => sealed,
    })
    await openPage(`${DRAW}/seal`, api)
    expect(screen.getByText(problems[0] as string)).toBeDefined()
    await seal()
    expect(api.of('sealDraw')).toEqual([])
  })

  it('leaves sealing to the promoter', async () => {
    await openPage(`${DRAW}/seal`, fakeApi({ ...base, getSession: () => session('organiser') }))
    expect(screen.getByText('Ready for the promoter to seal.')).toBeDefined()
    expect(screen.queryByRole('button', { name: 'Seal the list' })).toBeNull()
  })
})

describe('a witness', () => {
  const named = {
    id: '7c6d7b7a-52a4-4b0e-9b5a-7f6d5f0c3c25',
    person: { id: ME, name: 'Hester Vane' },
    name: 'H. Vane',
    role: 'Neighbour',
    connection: 'None.',
  }
  const said = (about: 'seal' | 'result', at: string) => ({
    witness: 'H. Vane',
    about,
    verdict: 'confirmed' as const,
    words: null,
    at,
  })
  const watched = (changes: Partial<OfficeDraw>) => {
    const draw = officeDraw({
      state: 'drawn',
      sealedAt: '2026-10-02T18:00:00Z',
      sealDigest: DIGEST,
      resultDigest: RESULT,
      witnesses: [named],
      ...changes,
    })
    return { ...draw, may: { ...draw.may, state: true } }
  }
  const open = async (draw: OfficeDraw) => {
    const api = fakeApi({
      getSession: () => session('witness'),
      getOfficeDraw: () => draw,
      listPeople: () => people(false),
      stateAsWitness: () => draw,
    })
    await openPage(DRAW, api)
    return api
  }

  it.each([
    ['seal', { state: 'sealed', resultDigest: null }, DIGEST],
    ['result', {}, RESULT],
  ] as const)('confirms the very digest of the %s', async (about, changes, digest) => {
    const api = await open(watched(changes))
    await act(async () => fireEvent.click(screen.getByRole('button', { name: `Confirm the ${about}` })))
    await waitFor(() =>
      expect(api.of('stateAsWitness')).toEqual([
        { params: { draw: DRAW_ID }, body: { about, digest, verdict: 'confirmed', words: '' } },
      ]),
    )
  })

  it('speaks once about each seal, and again after a new one', () => {
    const draw = { sealedAt: '2026-10-02T18:00:00Z', statements: [said('seal', '2026-10-02T18:30:00Z')] }
    expect(hasSpoken(draw, 'H. Vane', 'seal')).toBe(true)
    expect(hasSpoken(draw, 'Somebody else', 'seal')).toBe(false)
    expect(hasSpoken(draw, 'H. Vane', 'result')).toBe(false)
    expect(hasSpoken({ ...draw, sealedAt: '2026-10-02T19:00:00Z' }, 'H. Vane', 'seal')).toBe(false)
  })

  it('is not asked twice, and is led to no page of entrants', async () => {
    await open(watched({ statements: [said('result', '2026-10-03T20:00:00Z')] }))
    expect(screen.queryByRole('button', { name: 'Confirm the result' })).toBeNull()
    const road = within(screen.getByRole('navigation', { name: 'Steps of this draw' }))
    expect(road.getAllByRole('link').map((link) => link.textContent)).toEqual(['Overview', 'Terms', 'Prizes'])
  })
})

describe('the steps of a draw', () => {
  it('mark the page that is open; a sheet belongs to the entrants', async () => {
    const api = fakeApi({ getSession: () => session(), getOfficeDraw: () => officeDraw(), listImports: () => [] })
    await openPage(`${DRAW}/import`, api)
    const road = within(screen.getByRole('navigation', { name: 'Steps of this draw' }))
    const current = road.getAllByRole('link').filter((link) => link.getAttribute('aria-current') === 'page')
    expect(current.map((link) => link.textContent)).toEqual(['Entrants'])
  })
})

describe('drawFault', () => {
  it('says of which time a fault is, and leaves what the server says', () => {
    const generic = 'Type a date and a time, for example 11 December 2026, 19:30.'
    expect(drawFault({ field: 'closesAt', message: generic }).message).toMatch(
      /^Type the date and time of the closing, for/,
    )
    expect(drawFault({ field: 'drawAt', message: generic }).message).toMatch(/^Type the date and time of the draw, for/)
    const own = 'The draw is before the closing. Choose a later time.'
    expect(drawFault({ field: 'drawAt', message: own })).toEqual({ field: 'drawAt', message: own })
  })
  it('puts the fault of an amount on the field as it stands on the page', () => {
    expect(drawFault({ field: 'ticketPrice.minor', message: 'x' }).field).toBe('ticketPrice')
  })
})
