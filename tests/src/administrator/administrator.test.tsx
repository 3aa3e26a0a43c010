// @vitest-environment jsdom
import { act, cleanup, fireEvent, screen, waitFor } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import type { getSiteState, OrganisationRow } from '#shared/schemas/api/administrator.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { leadOf } from '#src/features/administrator/state-page.tsx'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { organisationRow, siteState } from '#tests/support/office/administrator-fixtures.ts'
import { session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(cleanup)

type SiteState = ResponseOf<typeof getSiteState>

describe('leadOf', () => {
  const lead = (changes: Partial<SiteState>) => leadOf({ ...siteState(), ...changes })
  const { jobs, mail, beacon, store } = siteState()
  const failed = jobs.failed[0] as SiteState['jobs']['failed'][number]

  it('is calm only when all is well', () => {
    expect(lead({ jobs: { ...jobs, failed: [] } })).toBe('Everything answers, and nothing is overdue.')
  })
  it.each<[string, Partial<SiteState>, string]>([
    [
      'the worker never came',
      { jobs: { ...jobs, failed: [], workerSeenAt: null } },
      'the worker gives no sign of life',
    ],
    [
      'the worker went',
      { jobs: { ...jobs, failed: [], workerSeenAt: '2026-09-20T09:58:59Z' } },
      'the worker gives no sign of life',
    ],
    ['a job failed', { jobs: { ...jobs, failed: [failed] } }, '1 job failed'],
    [
      'mail is down',
      { jobs: { ...jobs, failed: [] }, mail: { ...mail, reachable: false } },
      'the mail server cannot be reached',
    ],
    ['mails failed', { jobs: { ...jobs, failed: [] }, mail: { ...mail, failed: 2 } }, '2 mails failed'],
    [
      'no relay answers',
      {
        jobs: { ...jobs, failed: [] },
        beacon: { ...beacon, relays: beacon.relays.map((relay) => ({ ...relay, ok: false })) },
      },
      'no beacon relay answers',
    ],
    [
      'the store is down',
      { jobs: { ...jobs, failed: [] }, store: { ...store, reachable: false } },
      'the object store cannot be reached',
    ],
    [
      'the clock is wrong',
      { jobs: { ...jobs, failed: [] }, clockErrorSeconds: -3 },
      "the database's are -3 seconds apart",
    ],
    [
      'a draw is overdue',
      { jobs: { ...jobs, failed: [] }, overdue: [{ slug: 'a', title: 'A', drawAt: '2026-09-20T09:00:00Z' }] },
      '1 draw overdue',
    ],
  ])('says first when %s', (_, changes, words) => {
    expect(lead(changes)).toMatch(/^To look at: /)
    expect(lead(changes)).toContain(words)
    expect(lead(changes)).not.toContain(';')
  })
  it('forgives one silent relay, a silence of under a minute and a second of clock error', () => {
    const relays = beacon.relays.map((relay, index) => ({ ...relay, ok: index > 0 }))
    const calm = { ...jobs, failed: [], workerSeenAt: '2026-09-20T09:59:01Z' }
    expect(lead({ jobs: calm, beacon: { ...beacon, relays }, clockErrorSeconds: 1.9 })).toMatch(/^Everything answers/)
  })
})

describe('the state of an organisation', () => {
  async function open(state: OrganisationRow['state'], answers: Record<string, () => unknown> = {}) {
    const row = organisationRow({ state })
    const api = fakeApi({
      getSession: () => session('administrator'),
      getOrganisationForAdministrator: () => ({ organisation: row, people: [], invitations: [] }),
      changeOrganisationState: () => row,
      ...answers,
    })
    await openPage(`/admin/organisations/${row.slug}`, api)
    return { api, row }
  }
  const press = (name: string) => act(async () => fireEvent.click(screen.getByRole('button', { name })))

  it('approves without a reason, which the public would not understand', async () => {
    const { api, row } = await open('pending')
    expect(screen.queryByLabelText('Reason')).toBeNull()
    await press('Approve the organisation')
    await waitFor(() =>
      expect(api.of('changeOrganisationState')).toEqual([
        { params: { organisation: row.slug }, body: { version: row.version, state: 'approved', reason: null } },
      ]),
    )
  })

  it.each([
    ['approved', 'Suspend the organisation', 'suspended'],
    ['suspended', 'Restore the organisation', 'approved'],
  ] as const)('asks for a public reason where it is %s', async (state, action, next) => {
    const { api, row } = await open(state)
    await press(action)
    const alert = await screen.findByRole('alert')
    expect(document.activeElement).toBe(alert)
    expect(api.of('changeOrganisationState')).toEqual([])
    fireEvent.change(screen.getByLabelText('Reason'), { target: { value: 'Its registration has lapsed.' } })
    await press(action)
    await waitFor(() =>
      expect(api.of('changeOrganisationState')).toEqual([
        {
          params: { organisation: row.slug },
          body: { version: row.version, state: next, reason: 'Its registration has lapsed.' },
        },
      ]),
    )
  })

  it('keeps the reason when somebody else was faster', async () => {
    const detail = 'Another administrator changed it. Load the page again.'
    await open('approved', {
      changeOrganisationState: () => Promise.reject(refusal(409, detail, { code: 'changed' })),
    })
    fireEvent.change(screen.getByLabelText('Reason'), { target: { value: 'Its registration has lapsed.' } })
    await press('Suspend the organisation')
    await screen.findByText(detail)
    expect(screen.getByLabelText<HTMLTextAreaElement>('Reason').value).toBe('Its registration has lapsed.')
  })
})

describe('the administrator’s pages', () => {
  it('are closed to everybody else', async () => {
    const api = fakeApi({ getSession: () => session('promoter'), getSiteState: () => siteState() })
    await openPage('/admin', api)
    expect(screen.getByText('The error page')).toBeDefined()
  })
  it('try a failed job again and read the state anew', async () => {
    const api = fakeApi({
      getSession: () => session('administrator'),
      getSiteState: () => siteState(),
      retryJob: () => ({}),
    })
    await openPage('/admin', api)
    await act(async () => fireEvent.click(screen.getByRole('button', { name: 'Try again' })))
    await waitFor(() => expect(api.of('getSiteState')).toHaveLength(2))
    expect(api.of('retryJob')).toEqual([{ params: { job: siteState().jobs.failed[0]?.id } }])
  })
})
