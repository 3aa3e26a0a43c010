import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { createPasswords, type Passwords } from '#server/adapters/passwords/passwords.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { changeOrganisationState } from '#server/commands/organisations/change-organisation-state.ts'
import { createOrganisation } from '#server/commands/organisations/create-organisation.ts'
import { updateOrganisation } from '#server/commands/organisations/update-organisation.ts'
import { acceptInvitation } from '#server/commands/people/accept-invitation.ts'
import { changePassword } from '#server/commands/people/change-password.ts'
import { createAdministrator } from '#server/commands/people/create-administrator.ts'
import { invitePerson } from '#server/commands/people/invite-person.ts'
import { removePerson } from '#server/commands/people/remove-person.ts'
import { requestPasswordReset } from '#server/commands/people/request-password-reset.ts'
import { resetPassword } from '#server/commands/people/reset-password.ts'
import { revokeInvitation } from '#server/commands/people/revoke-invitation.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { sendMail } from '#server/jobs/mail/send-mail.ts'
import { getOrganisation } from '#server/store/queries/organisations.ts'
import { getOrganisationForAdministrator, listAllOrganisations } from '#server/store/queries/administrator.ts'
import { getLog } from '#server/store/queries/log.ts'
import { findAccount, findSignedIn, getInvitation, getPasswordReset, listPeople } from '#server/store/queries/people.ts'
import { mail, mailContent } from '#server/store/schema/operation.ts'
import { invitation, passwordReset, session } from '#server/store/schema/people.ts'
import { makeOffice, type Office } from '#tests/support/draws.ts'
import { simpleParser } from 'mailparser'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
const PASSWORD = 'gravel pocket violin'
let site: TestSite
let office: Office
let passwords: Passwords
let services: TestSite['services'] & { readonly passwords: Passwords }
beforeAll(async () => {
  site = await startTestSite({ clock })
  passwords = createPasswords({ cost: 4 })
  services = { ...site.services, passwords }
  office = await makeOffice(services)
})
afterAll(async () => {
  await passwords.close()
  await site.close()
})

async function refusal(action: Promise<unknown>): Promise<CommandError> {
  try {
    await action
  } catch (error) {
    if (error instanceof CommandError) return error
    throw error
  }
  throw new Error('The command let this pass.')
}

/** The secret in the newest mail to an address, as its reader finds it. */
async function tokenIn(address: string): Promise<string> {
  await sendMail(services, goOn)
  const newest = site.mail.store.list(address).reduce((a, b) => (a.number > b.number ? a : b))
  const { text } = await simpleParser(site.mail.store.raw(newest))
  return /(?:invitations|password-resets)\/([A-Za-z0-9_-]{43})\b/.exec(text ?? '')?.[1] ?? ''
}
const invite = (email: string, role: 'promoter' | 'organiser' | 'witness' = 'organiser') =>
  invitePerson(services, office.promoter, { organisation: office.organisation, email, role })
const signIn = (personId: string, sid: string) =>
  services.db.insert(session).values({ sid, sess: { personId }, expire: new Date(Date.now() + 3600_000) })
const sessions = async (personId: string) =>
  (await services.db.select().from(session)).filter(({ sess }) => sess.personId === personId).map(({ sid }) => sid)

describe('an invitation', () => {
  it('gives somebody new an account and a role, once', async () => {
    await invite('Una@People.example')
    const token = await tokenIn('una@people.example')
    expect(await getInvitation(services, token)).toEqual({
      organisation: 'Quarry Lane Choir',
      role: 'organiser',
      email: 'una@people.example',
      invitedBy: 'Odile Brandt',
      knownPerson: false,
    })
    const short = acceptInvitation(services, { token, name: 'Una Moss', password: 'short' })
    expect((await refusal(short)).fields).toMatchObject([{ field: 'password' }])
    const { personId } = await acceptInvitation(services, { token, name: 'Una Moss', password: PASSWORD })
    expect(await findSignedIn(services.db, personId)).toMatchObject({
      name: 'Una Moss',
      administrator: false,
      memberships: [{ role: 'organiser', organisation: { slug: office.organisation } }],
    })
    expect((await refusal(acceptInvitation(services, { token, name: 'Eve', password: PASSWORD }))).code).toBe('expired')
    expect(await getInvitation(services, token)).toBeNull()
  })
  it('keeps no token in the database, and no address once its mail is sent', async () => {
    const { id } = await invite('vic@people.example')
    const key = `invitation:${id}`
    const content = async () =>
      services.db.select().from(mailContent).innerJoin(mail, eq(mail.id, mailContent.mailId)).where(eq(mail.key, key))
    expect(await content()).toHaveLength(1)
    const token = await tokenIn('vic@people.example')
    expect(await content()).toEqual([])
    const [row] = await services.db.select().from(invitation).where(eq(invitation.id, id))
    expect(JSON.stringify(row)).not.toContain(token)
    const [sent] = await services.db.select().from(mail).where(eq(mail.key, key))
    expect(JSON.stringify(sent)).not.toMatch(/vic@/)
  })
  it('wants the password of an account that exists', async () => {
    await invite('wim@people.example')
    await acceptInvitation(services, {
      token: await tokenIn('wim@people.example'),
      name: 'Wim Adder',
      password: PASSWORD,
    })
    const other = await makeOffice(services)
    await invitePerson(services, other.promoter, {
      organisation: other.organisation,
      email: 'wim@people.example',
      role: 'witness',
    })
    const token = await tokenIn('wim@people.example')
    expect((await refusal(acceptInvitation(services, { token, password: 'not the right one' }))).code).toBe(
      'wrong-password',
    )
    const { personId } = await acceptInvitation(services, { token, password: PASSWORD })
    expect((await findSignedIn(services.db, personId))?.memberships.map(({ role }) => role).sort()).toEqual([
      'organiser',
      'witness',
    ])
  })
  it('works no more when it is taken back, replaced by a newer one, or two weeks old', async () => {
    const { id } = await invite('xan@people.example')
    const first = await tokenIn('xan@people.example')
    await invite('xan@people.example')
    const second = await tokenIn('xan@people.example')
    expect(await getInvitation(services, first)).toBeNull()
    expect(await getInvitation(services, second)).not.toBeNull()
    const again = revokeInvitation(services, office.promoter, { organisation: office.organisation, invitation: id })
    expect((await refusal(again)).code).toBe('not-found')
    clock.advance(14 * 24 * 3600_000)
    expect(await getInvitation(services, second)).toBeNull()
    expect((await refusal(acceptInvitation(services, { token: second, name: 'Xan', password: PASSWORD }))).code).toBe(
      'expired',
    )
    expect((await listPeople(services, office.organisation))?.invitations.map(({ email }) => email)).not.toContain(
      'xan@people.example',
    )
  })
  it('is refused for an administrator and for somebody who is there already', async () => {
    await createAdministrator(services, { email: 'root@site.example', name: 'Root' })
    expect((await refusal(invite('root@site.example'))).message).toContain('administrator of the site')
    expect((await refusal(invite('una@people.example', 'promoter'))).message).toContain('organiser here already')
  })
})

describe('a person', () => {
  it('loses role and sessions at once; the last promoter stays', async () => {
    const account = await findAccount(services.db, 'UNA@people.example')
    if (!account) throw new Error('no account')
    await signIn(account.id, 'una-1')
    await removePerson(services, office.promoter, { organisation: office.organisation, person: account.id })
    expect(await sessions(account.id)).toEqual([])
    expect((await findSignedIn(services.db, account.id))?.memberships).toEqual([])
    const last = removePerson(services, office.promoter, {
      organisation: office.organisation,
      person: office.promoter.id,
    })
    expect((await refusal(last)).message).toContain('needs a promoter')
  })
  it('sets a new password by a link that works once and for an hour; all sessions end', async () => {
    const account = await findAccount(services.db, 'wim@people.example')
    if (!account) throw new Error('no account')
    await signIn(account.id, 'wim-1')
    await requestPasswordReset(services, { email: ' Wim@people.example' })
    const token = await tokenIn('wim@people.example')
    expect(await getPasswordReset(services, token)).toEqual({ email: 'wim@people.example' })
    await resetPassword(services, { token, password: 'another pocket violin' })
    expect(await sessions(account.id)).toEqual([])
    expect((await refusal(resetPassword(services, { token, password: PASSWORD }))).code).toBe('expired')
    await requestPasswordReset(services, { email: 'wim@people.example' })
    const late = await tokenIn('wim@people.example')
    clock.advance(3600_000)
    expect((await refusal(resetPassword(services, { token: late, password: PASSWORD }))).code).toBe('expired')
    const after = await findAccount(services.db, 'wim@people.example')
    expect(await passwords.verify('another pocket violin', after?.passwordHash ?? null)).toBe(true)
  })
  it('who is not known gets no mail, and nobody is told', async () => {
    const before = await services.db.$count(passwordReset)
    await requestPasswordReset(services, { email: 'nobody@people.example' })
    expect(await services.db.$count(passwordReset)).toBe(before)
  })
  it('changes the password; only the present session stays', async () => {
    const account = await findAccount(services.db, 'wim@people.example')
    if (!account) throw new Error('no account')
    await signIn(account.id, 'wim-here')
    await signIn(account.id, 'wim-there')
    const actor = { id: account.id, name: 'Wim Adder' }
    const wrong = changePassword(services, actor, { current: 'wrong', password: PASSWORD, session: 'wim-here' })
    expect((await refusal(wrong)).fields).toMatchObject([{ field: 'current' }])
    await changePassword(services, actor, { current: 'another pocket violin', password: PASSWORD, session: 'wim-here' })
    expect(await sessions(account.id)).toEqual(['wim-here'])
  })
})

describe('an organisation', () => {
  const root = async () => {
    const account = await findAccount(services.db, 'root@site.example')
    return { id: account?.id ?? '', name: 'Root' }
  }
  const values = {
    name: 'Otter Dell Scouts',
    registration: null,
    address: 'The Hut',
    about: 'Scouts.',
    timeZone: 'Europe/Dublin',
    currency: 'EUR',
  }
  it('is made, approved, renamed, suspended and restored; the last two with a public reason in the log', async () => {
    const actor = await root()
    const { slug } = await createOrganisation(services, actor, { ...values, promoterEmail: 'yara@people.example' })
    const row = async () => (await getOrganisationForAdministrator(services, slug))?.organisation
    expect(await row()).toMatchObject({ slug: 'otter-dell-scouts', state: 'pending', people: 0, draws: {} })
    const change = async (state: 'approved' | 'suspended', reason: string | null) =>
      changeOrganisationState(services, actor, {
        organisation: slug,
        version: (await row())?.version ?? 0,
        state,
        reason,
      })
    await change('approved', null)
    expect((await refusal(change('suspended', null))).fields).toMatchObject([{ field: 'reason' }])
    await change('suspended', 'Prizes of two draws were not handed over.')
    expect((await getOrganisation(services.db, slug))?.suspension).toEqual({
      at: expect.stringMatching(/Z$/),
      reason: 'Prizes of two draws were not handed over.',
    })
    await change('approved', 'All prizes were handed over.')
    expect((await getOrganisation(services.db, slug))?.suspension).toBeNull()
    const stale = updateOrganisation(services, actor, { organisation: slug, version: 1, values })
    expect((await refusal(stale)).code).toBe('changed')
    await updateOrganisation(services, actor, {
      organisation: slug,
      version: (await row())?.version ?? 0,
      values: { ...values, name: 'Otter Dell Sea Scouts' },
    })
    expect(await row()).toMatchObject({ name: 'Otter Dell Sea Scouts', slug, state: 'approved' })
    const { items } = await getLog(services.db, { page: 1 })
    expect(items.slice(0, 2)).toMatchObject([
      { event: 'restored', note: 'All prizes were handed over.', draw: null, organisation: { slug } },
      { event: 'suspended', note: 'Prizes of two draws were not handed over.' },
    ])
    expect(
      (await listAllOrganisations(services.db, { q: 'SEA', state: 'all', page: 1 })).items.map((found) => found.slug),
    ).toEqual([slug])
  })
  it('needs a time zone that exists', async () => {
    const made = createOrganisation(services, await root(), {
      ...values,
      timeZone: 'Europe/Atlantis',
      promoterEmail: 'z@people.example',
    })
    expect((await refusal(made)).fields).toMatchObject([{ field: 'timeZone' }])
  })
})
