// @vitest-environment jsdom
import { act, cleanup, fireEvent, screen, waitFor } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { homeOf, safeNext } from '#src/lib/session.ts'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { HALL, session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(cleanup)

const type = (label: string, value: string) => fireEvent.change(screen.getByLabelText(label), { target: { value } })
const press = (name: string | RegExp) => act(async () => fireEvent.click(screen.getByRole('button', { name })))

describe('safeNext', () => {
  it.each(['/', '/office', '/office/hall/draws?q=a%20b&page=2', '/draws/spring#winners', '/a//b'])(
    'follows %j',
    (next) => expect(safeNext(next)).toBe(next),
  )
  it.each([
    null,
    '',
    'office',
    'https://other.example/',
    'javascript:alert(1)',
    '//other.example',
    '///other.example',
    '/\\other.example',
    '\\/other.example',
    '/office\\..\\..\\other.example',
    '/\t/other.example',
    '/\n/other.example',
    ' /office',
  ])('does not follow %j', (next) => expect(safeNext(next)).toBeNull())
  it('leads nowhere else as a browser reads it (WHATWG URL)', () => {
    for (const next of [
      '/',
      '/a//b',
      '/.//other.example',
      '/%2f/other.example',
      '/?//other.example',
      '/@other.example',
    ]) {
      const safe = safeNext(next)
      if (safe !== null) expect(new URL(safe, 'https://evenpenny.example').host).toBe('evenpenny.example')
    }
  })
})

describe('signing in', () => {
  const anonymous = { getSession: () => session(null) }

  it('keeps the address and leads to what is wrong', async () => {
    const detail = 'The address or the password is not right.'
    await openPage('/sign-in', fakeApi({ ...anonymous, signIn: () => Promise.reject(refusal(401, detail)) }))
    type('E-mail address', 'hester@otterford.example')
    type('Password', 'not the one')
    await press('Sign in')
    const alert = await screen.findByRole('alert')
    expect(alert.textContent).toContain(detail)
    expect(document.activeElement).toBe(alert)
    expect(screen.getByLabelText<HTMLInputElement>('E-mail address').value).toBe('hester@otterford.example')
    expect(document.title).toMatch(/^Error: /)
  })

  it('names each field that is empty, and asks nobody', async () => {
    const api = fakeApi(anonymous)
    await openPage('/sign-in', api)
    await press('Sign in')
    await screen.findByRole('alert')
    const links = screen.getAllByRole('link').map((link) => link.getAttribute('href'))
    expect(links).toContain('#email')
    expect(links).toContain('#password')
    expect(screen.getByLabelText('Password').getAttribute('aria-invalid')).toBe('true')
    expect(api.of('signIn')).toEqual([])
  })

  it.each([
    ['', 'promoter', '/office'],
    ['', 'administrator', '/admin'],
    ['?next=%2Foffice%2Fhall%2Fpeople', 'promoter', '/office/hall/people'],
    ['?next=%2F%2Fother.example', 'promoter', '/office'],
  ] as const)('goes on from /sign-in%s as %s to %s', async (search, role, to) => {
    const signedIn = session(role)
    expect(signedIn.person && homeOf(signedIn.person)).toBe(role === 'administrator' ? '/admin' : '/office')
    const api = fakeApi({ ...anonymous, signIn: () => signedIn })
    const { router } = await openPage(`/sign-in${search}`, api)
    const visited: string[] = []
    router.subscribe((state) => {
      if (state.navigation.location) visited.push(state.navigation.location.pathname)
    })
    type('E-mail address', ' hester@otterford.example ')
    type('Password', 'three unrelated words')
    await press('Sign in')
    await waitFor(() => expect(visited).toContain(to))
    expect(visited[0]).toBe(to)
    expect(api.of('signIn')).toEqual([
      { body: { email: 'hester@otterford.example', password: 'three unrelated words' } },
    ])
  })
})

describe('passwords', () => {
  it('answers the same whether or not the address has an account', async () => {
    const api = fakeApi({ getSession: () => session(null), requestPasswordReset: () => ({}) })
    await openPage('/password-resets', api)
    type('E-mail address', 'nobody@otterford.example')
    await press('Send me the link')
    await screen.findByText(/If nobody@otterford.example belongs to an account, a link is on its way/)
  })

  it('refuses a short new password without sending it', async () => {
    const token = 'a'.repeat(43)
    const api = fakeApi({
      getSession: () => session(null),
      getPasswordReset: () => ({ email: 'hester@otterford.example' }),
    })
    await openPage(`/password-resets/${token}`, api)
    type('New password', 'elevenchars')
    await press('Set the password')
    expect((await screen.findAllByText(/Use at least 12 characters/)).length).toBeGreaterThan(0)
    expect(screen.getByLabelText<HTMLInputElement>('New password').value).toBe('elevenchars')
    expect(api.of('resetPassword')).toEqual([])
  })

  it('asks a person who is known for their password, not for a new one', async () => {
    const token = 'b'.repeat(43)
    const invitation = {
      organisation: HALL.name,
      role: 'witness' as const,
      email: 'ivy@otterford.example',
      invitedBy: 'Hester Vane',
      knownPerson: true,
    }
    const api = fakeApi({
      getSession: () => session(null),
      getInvitation: () => invitation,
      acceptInvitation: () => session('witness'),
    })
    await openPage(`/invitations/${token}`, api)
    expect(screen.queryByLabelText('Your name')).toBeNull()
    type('Your password', 'three unrelated words')
    await press('Accept')
    await waitFor(() =>
      expect(api.of('acceptInvitation')).toEqual([{ params: { token }, body: { password: 'three unrelated words' } }]),
    )
  })
})
