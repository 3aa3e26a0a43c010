// @vitest-environment jsdom
import { QueryClientProvider } from '@tanstack/react-query'
import { act, cleanup, renderHook, waitFor } from '@testing-library/react'
import type { ReactNode } from 'react'
import { afterEach, describe, expect, it, vi } from 'vitest'
import { addEntrant } from '#shared/schemas/api/office.ts'
import { AppContextReact } from '#src/lib/app-context.ts'
import { browserApiClient } from '#src/lib/api-client.ts'
import { createQueryClient } from '#src/lib/query-client.ts'
import { useSubmit } from '#src/lib/use-submit.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { DRAW_ID, entrant } from '#tests/support/office/fixtures.ts'

afterEach(cleanup)

const typed = { name: 'Lowenna Trask', tickets: 4, label: '', email: '', phone: '', numbers: '' }
const input = (changes: Partial<typeof typed> = {}) => ({ params: { draw: DRAW_ID }, body: { ...typed, ...changes } })

function submitting(api: ApiClient, onDone: (...args: unknown[]) => unknown = () => {}) {
  const queryClient = createQueryClient()
  const wrapper = ({ children }: { readonly children: ReactNode }) => (
    <AppContextReact value={{ api, origin: '' }}>
      <QueryClientProvider client={queryClient}>{children}</QueryClientProvider>
    </AppContextReact>
  )
  return renderHook(() => useSubmit(addEntrant, onDone), { wrapper })
}

describe('useSubmit', () => {
  it('tells of mistakes in the words of the schema, one a field, and sends nothing', async () => {
    const api = fakeApi({ addEntrant: () => entrant(1) })
    const { result } = submitting(api)
    act(() => result.current.submit(input({ name: ' ', tickets: Number.NaN, email: 'not an address' })))
    await waitFor(() => expect(result.current.failed).toBe(true))
    expect(result.current.faults).toEqual([
      { field: 'name', message: 'Type the name.' },
      { field: 'tickets', message: 'Type a whole number of tickets.' },
      { field: 'email', message: 'Type an e-mail address, for example ana@group.example.' },
    ])
    expect(result.current.faultOf('tickets')).toBe('Type a whole number of tickets.')
    expect(result.current.faultOf('phone')).toBeUndefined()
    expect(result.current.detail).toBeUndefined()
    expect(api.calls).toEqual([])
  })

  it.each([
    [{ tickets: 0 }, 'tickets', 'Type at least 1 ticket.'],
    [{ tickets: 2 ** 32 }, 'tickets', 'An entrant holds at most 4,294,967,295 tickets.'],
    [{ label: 'a\u202eb' }, 'label', 'Leave out line breaks and invisible control characters.'],
    [{ phone: '0'.repeat(41) }, 'phone', 'Use at most 40 characters.'],
  ])('says what to do about %o', async (changes, field, message) => {
    const { result } = submitting(fakeApi({}))
    act(() => result.current.submit(input(changes)))
    await waitFor(() => expect(result.current.faults).toEqual([{ field, message }]))
  })

  it('puts what the server finds on the same fields', async () => {
    const errors = [{ field: 'numbers', message: 'Another entrant holds 0201.' }]
    const api = fakeApi({ addEntrant: () => Promise.reject(refusal(422, 'One field needs another look.', { errors })) })
    const { result } = submitting(api)
    act(() => result.current.submit(input()))
    await waitFor(() => expect(result.current.faultOf('numbers')).toBe('Another entrant holds 0201.'))
    expect(result.current.detail).toBeUndefined()
    expect(result.current.status).toBe(422)
    expect(result.current.changed).toBe(false)
  })

  it('tells a change by somebody else from a refusal, both 409', async () => {
    for (const [code, changed] of [
      ['changed', true],
      ['refused', false],
    ] as const) {
      const api = fakeApi({ addEntrant: () => Promise.reject(refusal(409, 'Look again.', { code })) })
      const { result } = submitting(api)
      act(() => result.current.submit(input()))
      await waitFor(() => expect(result.current.detail).toBe('Look again.'))
      expect(result.current.changed).toBe(changed)
    }
  })

  it('hides the words of a fault in the page itself', async () => {
    const { result } = submitting(fakeApi({ addEntrant: () => Promise.reject(new TypeError('x is not a function')) }))
    act(() => result.current.submit(input()))
    await waitFor(() => expect(result.current.failed).toBe(true))
    expect(result.current.detail).not.toContain('function')
  })

  it('sends once however often it is asked while busy, and hands over the answer', async () => {
    let answer: (value: unknown) => void = () => {}
    const api = fakeApi({ addEntrant: () => new Promise((resolve) => (answer = resolve)) })
    const done = vi.fn()
    const { result } = submitting(api, done)
    act(() => result.current.submit(input()))
    await waitFor(() => expect(result.current.busy).toBe(true))
    act(() => result.current.submit(input({ name: 'Another' })))
    await act(async () => answer(entrant(1)))
    await waitFor(() => expect(result.current.busy).toBe(false))
    expect(api.calls).toHaveLength(1)
    expect(done).toHaveBeenCalledExactlyOnceWith(entrant(1), input())
  })
})

describe('the browser’s API client', () => {
  const answering = (status: number, body: unknown) =>
    browserApiClient(async () => new Response(typeof body === 'string' ? body : JSON.stringify(body), { status }))
  const call = (api: ApiClient) => api.call(addEntrant, input()).catch((error: Error) => error)

  it('says that there is no connection', async () => {
    const api = browserApiClient(async () => Promise.reject(new TypeError('Failed to fetch')))
    expect(await call(api)).toMatchObject({
      details: { status: 0, detail: expect.stringMatching(/Check the connection/) },
    })
  })

  it('keeps the problem that the server wrote', async () => {
    const details = { type: '/problems/refused', title: 'Conflict', status: 409, detail: 'The list is closed.' }
    expect(await call(answering(409, details))).toMatchObject({ details })
  })

  it('has words for an answer that is no problem document, and for one of another shape', async () => {
    expect(await call(answering(502, '<h1>Bad gateway</h1>'))).toMatchObject({ details: { status: 502 } })
    expect(await call(answering(200, { id: 7 }))).toMatchObject({
      details: { detail: expect.stringMatching(/Load the page again/) },
    })
  })
})
