import { describe, expect, it, vi } from 'vitest'
import { browserApiClient, endpointUrl } from '#src/lib/api-client.ts'
import { problemOf } from '#src/lib/problem-of.ts'
import { getDraw, getPick, searchDraws } from '#shared/schemas/api/public.ts'
import { signIn } from '#shared/schemas/api/session.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { openDraw } from '#tests/support/public-pages/fixtures.ts'

const answering = (body: unknown, status = 200) =>
  vi.fn((..._: Parameters<typeof fetch>) =>
    Promise.resolve(new Response(typeof body === 'string' ? body : JSON.stringify(body), { status })),
  )

async function failure(promise: Promise<unknown>) {
  const error: unknown = await promise.then(
    () => null,
    (reason: unknown) => reason,
  )
  if (!(error instanceof Problem)) throw new Error('a Problem was expected')
  return error.details
}

describe('the address of a call', () => {
  it('fills in parameters, escaped, and leaves empty query members out', () => {
    expect(endpointUrl(getPick, { params: { slug: 'spring', pick: 3 } })).toBe('/api/draws/spring/picks/3')
    expect(endpointUrl(getDraw, { params: { slug: '../x' } })).toBe('/api/draws/..%2Fx')
    expect(endpointUrl(searchDraws, { query: { q: 'bells & ropes', page: 2, state: undefined } })).toBe(
      '/api/draws?q=bells+%26+ropes&page=2',
    )
  })
  it('refuses a missing parameter', () => {
    expect(() => endpointUrl(getDraw, {})).toThrow('slug')
  })
})

describe('a call', () => {
  it('gives the answer, parsed', async () => {
    const draw = openDraw()
    const client = browserApiClient(answering(draw))
    await expect(client.call(getDraw, { params: { slug: draw.slug } })).resolves.toEqual(draw)
  })
  it('sends a body as JSON with the session', async () => {
    const fetched = answering({ type: 'about:blank', title: 'No', status: 401, detail: 'Wrong password.' }, 401)
    const details = await failure(
      browserApiClient(fetched).call(signIn, { body: { email: 'a@b.example', password: 'x' } }),
    )
    expect(details.detail).toBe('Wrong password.')
    const [address, options] = fetched.mock.calls[0] ?? []
    expect(address).toBe('/api/session')
    expect(options).toMatchObject({
      method: 'POST',
      credentials: 'same-origin',
      body: '{"email":"a@b.example","password":"x"}',
    })
  })
  it('turns no connection, nonsense and an unknown answer into problems that say what to do', async () => {
    const offline = browserApiClient(() => Promise.reject(new TypeError('failed to fetch')))
    expect((await failure(offline.call(getDraw, { params: { slug: 'a' } }))).status).toBe(0)
    const nonsense = browserApiClient(answering('<html>', 502))
    expect((await failure(nonsense.call(getDraw, { params: { slug: 'a' } }))).status).toBe(502)
    const unknown = browserApiClient(answering({ slug: 'a' }))
    expect((await failure(unknown.call(getDraw, { params: { slug: 'a' } }))).detail).toContain('Load the page again')
  })
})

describe('a problem told by its shape', () => {
  it('is known though another bundle’s class made it, and nothing else is', () => {
    class Other extends Error {
      readonly details = { type: 'about:blank', title: 'Gone', status: 410, detail: 'It was taken down.' }
    }
    expect(problemOf(new Other())?.status).toBe(410)
    expect(problemOf(new Error('x'))).toBeNull()
    expect(problemOf({ details: {} })).toBeNull()
  })
})
