// @vitest-environment jsdom
import { act, cleanup, fireEvent, screen, waitFor } from '@testing-library/react'
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { fakeApi, refusal } from '#tests/support/office/fake-api.ts'
import { HALL, ME, OFFICE, OTHER, people, session } from '#tests/support/office/fixtures.ts'
import { openPage } from '#tests/support/office/render.tsx'

beforeEach(() => vi.stubGlobal('scrollTo', () => {}))
afterEach(cleanup)

const button = (name: string | RegExp) => screen.getByRole('button', { name })
const base = { getSession: () => session(), listPeople: () => people() }
const path = `${OFFICE}/people`

describe('the people of an organisation', () => {
  it('removes nobody before it has said what that means', async () => {
    let gone = false
    const api = fakeApi({
      ...base,
      listPeople: () => (gone ? { ...people(), people: people().people.slice(0, 1) } : people()),
      removePerson: () => {
        gone = true
        return {}
      },
    })
    await openPage(path, api)
    fireEvent.click(button('Remove Tomos Ruddle'))
    const group = screen.getByRole('group', { name: `Remove Tomos Ruddle from ${HALL.name}?` })
    expect(document.activeElement).toBe(group)
    expect(group.textContent).toMatch(/signed out everywhere at once/)
    expect(api.of('removePerson')).toEqual([])
    await act(async () => fireEvent.click(button('Remove')))
    await waitFor(() => expect(screen.queryByText('Tomos Ruddle')).toBeNull())
    expect(api.of('removePerson')).toEqual([{ params: { organisation: HALL.slug, person: OTHER } }])
    expect(screen.getByText('Tomos Ruddle is removed.')).toBeDefined()
  })

  it('keeps them when told to, and gives the focus back', async () => {
    const api = fakeApi(base)
    await openPage(path, api)
    fireEvent.click(button('Remove Tomos Ruddle'))
    fireEvent.click(button('Keep'))
    expect(screen.queryByRole('group', { name: /^Remove Tomos/ })).toBeNull()
    expect(document.activeElement).toBe(button('Remove Tomos Ruddle'))
    expect(api.of('removePerson')).toEqual([])
  })

  it('says in the server’s words why a promoter cannot be removed', async () => {
    const detail = 'An organisation needs a promoter. Invite another one first.'
    const api = fakeApi({ ...base, removePerson: () => Promise.reject(refusal(409, detail)) })
    await openPage(path, api)
    fireEvent.click(button('Remove Hester Vane'))
    expect(screen.getByRole('group', { name: `Leave ${HALL.name}?` })).toBeDefined()
    await act(async () => fireEvent.click(button('Leave')))
    await screen.findByText(detail)
    expect(screen.getByText('Hester Vane (you)')).toBeDefined()
  })

  it('ends the visit of whoever leaves', async () => {
    let left = false
    const api = fakeApi({
      ...base,
      getSession: () => session(left ? null : 'promoter'),
      removePerson: () => {
        left = true
        return {}
      },
    })
    const { router } = await openPage(path, api)
    fireEvent.click(button('Remove Hester Vane'))
    await act(async () => fireEvent.click(button('Leave')))
    await waitFor(() => expect(router.state.location.pathname).toBe('/sign-in'))
    expect(api.of('removePerson')).toEqual([{ params: { organisation: HALL.slug, person: ME } }])
  })

  it('offers an organiser nothing to change', async () => {
    await openPage(path, fakeApi({ getSession: () => session('organiser'), listPeople: () => people(false) }))
    expect(screen.getByText('Tomos Ruddle')).toBeDefined()
    expect(screen.getByText(/A promoter invites and removes people/)).toBeDefined()
    for (const name of [/^Remove/, /^Take back/, /^Send the invitation/]) {
      expect(screen.queryByRole('button', { name })).toBeNull()
    }
  })

  it('invites to the role that was chosen, and empties the form', async () => {
    const api = fakeApi({
      ...base,
      invitePerson: () => ({ ...people().invitations[0], email: 'joss@otterford.example' }),
    })
    await openPage(path, api)
    await act(async () => fireEvent.click(button('Send the invitation')))
    await screen.findAllByText(/Type an e-mail address/)
    expect(api.of('invitePerson')).toEqual([])
    fireEvent.change(screen.getByLabelText('E-mail address'), { target: { value: ' joss@otterford.example ' } })
    fireEvent.click(screen.getByRole('radio', { name: /^Witness/ }))
    await act(async () => fireEvent.click(button('Send the invitation')))
    await screen.findByText('An invitation is on its way to joss@otterford.example.')
    expect(api.of('invitePerson')).toEqual([
      { params: { organisation: HALL.slug }, body: { email: 'joss@otterford.example', role: 'witness' } },
    ])
    expect(screen.getByLabelText<HTMLInputElement>('E-mail address').value).toBe('')
  })

  it('takes an invitation back', async () => {
    const api = fakeApi({ ...base, revokeInvitation: () => ({}) })
    await openPage(path, api)
    await act(async () => fireEvent.click(button('Take back the invitation to ivy@otterford.example')))
    await screen.findByText('The invitation to ivy@otterford.example is taken back.')
    expect(api.of('revokeInvitation')).toEqual([
      { params: { organisation: HALL.slug, invitation: people().invitations[0]?.id } },
    ])
  })
})

describe('the way into the office', () => {
  it('sends whoever is not signed in to the sign-in page, which leads back', async () => {
    const { router } = await openPage(`${path}?a=b`, fakeApi({ ...base, getSession: () => session(null) }))
    expect(router.state.location.pathname).toBe('/sign-in')
    expect(new URLSearchParams(router.state.location.search).get('next')).toBe(`${path}?a=b`)
  })

  it('shows another organisation nothing', async () => {
    await openPage('/office/elsewhere/people', fakeApi({ ...base, listPeople: () => people() }))
    expect(screen.getByText('The error page')).toBeDefined()
    expect(screen.queryByText('Tomos Ruddle')).toBeNull()
  })
})
