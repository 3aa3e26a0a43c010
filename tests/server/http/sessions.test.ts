import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startWebSite, PASSWORD, type WebSite } from '#tests/support/web-site.ts'

let site: WebSite
beforeAll(async () => {
  site = await startWebSite({
    limits: {
      byAddress: { tries: 1000, seconds: 60 },
      byAccount: { tries: 3, seconds: 60 },
      resets: { tries: 2, seconds: 60 },
      tokens: { tries: 1000, seconds: 60 },
    },
  })
})
afterAll(() => site.close())

const signIn = (email: string, password = PASSWORD) =>
  request(site.listener).post('/api/session').send({ email, password })
const who = async (client: Pick<Awaited<ReturnType<WebSite['client']>>, 'get'>) =>
  ((await client.get('/api/session')).body as { person: { email: string } | null }).person?.email ?? null
const tokenOf = (link: string) => link.split('/').at(-1) as string

describe('signing in', () => {
  it('gives a session and says who it is, with their roles', async () => {
    const person = await site.person({ name: 'Ada Brandt' })
    const organisation = await site.organisation()
    await site.member(organisation.id, person.id, 'organiser')
    const answer = await signIn(person.email.toUpperCase())
    expect(answer.status).toBe(200)
    expect(answer.body.person).toEqual({
      id: person.id,
      name: 'Ada Brandt',
      email: person.email,
      administrator: false,
      memberships: [
        {
          organisation: {
            slug: organisation.slug,
            name: 'Rowan Street Band',
            state: 'approved',
            timeZone: 'Europe/London',
          },
          role: 'organiser',
        },
      ],
    })
    expect(JSON.stringify(answer.body)).not.toMatch(/\$2b\$|passwordHash/)
    expect(String(answer.headers['set-cookie'])).toMatch(/^evenpenny=.*; Path=\/; HttpOnly; SameSite=Lax$/)
  })

  it('says the same of a wrong password and of an unknown or a disabled account', async () => {
    const person = await site.person()
    const disabled = await site.person()
    await site.database.pool.query('update person set disabled_at = now() where id = $1', [disabled.id])
    const answers = [
      await signIn(person.email, 'another password'),
      await signIn('nobody@group.example'),
      await signIn(disabled.email),
    ]
    for (const answer of answers) {
      expect(answer.status).toBe(401)
      expect(answer.headers['set-cookie']).toBeUndefined()
      expect(answer.headers['www-authenticate']).toBeDefined()
      expect(answer.body).toEqual({ ...answers[0]?.body })
    }
  })

  it('gives a new session id, whatever cookie came along', async () => {
    const person = await site.person()
    const client = await site.client(person.email)
    const ids = async () =>
      (
        await site.database.pool.query<{ sid: string }>(`select sid from session where sess ->> 'personId' = $1`, [
          person.id,
        ])
      ).rows
    const [before] = await ids()
    await client.post('/api/session').send({ email: person.email, password: PASSWORD }).expect(200)
    const after = await ids()
    expect(after.length).toBe(1)
    expect(after[0]?.sid).not.toBe(before?.sid)
  })

  it('gives visitors who only read no cookie and no row', async () => {
    const count = async () => (await site.database.pool.query('select from session')).rowCount
    const before = await count()
    const answer = await request(site.listener).get('/api/session')
    expect(answer.headers['set-cookie']).toBeUndefined()
    await request(site.listener).get('/sign-in')
    expect(await count()).toBe(before)
  })

  it('takes no cookie with another signature', async () => {
    const person = await site.person()
    const answer = await signIn(person.email)
    const [cookie = ''] = String(answer.headers['set-cookie']).split(';')
    const ask = (sent: string) => request(site.listener).get('/api/session').set('Cookie', sent)
    expect((await ask(cookie)).body.person.email).toBe(person.email)
    const forged = cookie.replace(/.$/, (last) => (last === 'A' ? 'B' : 'A'))
    expect((await ask(forged)).body.person).toBeNull()
  })
})

describe('limits', () => {
  it('stop tries at one account, the right password too, and say how long to wait', async () => {
    const person = await site.person()
    for (let i = 0; i < 3; i++) expect((await signIn(person.email, `guess ${i} of many`)).status).toBe(401)
    const stopped = await signIn(person.email)
    expect(stopped.status).toBe(429)
    expect(stopped.type).toBe('application/problem+json')
    expect(stopped.body).toMatchObject({
      type: '/problems/too-many-tries',
      detail: 'There were too many tries to sign in to this account. Wait a minute and try again.',
    })
    const wait = Number(stopped.headers['retry-after'])
    expect(wait).toBeGreaterThan(50)
    expect(wait).toBeLessThanOrEqual(60)
    const other = await site.person()
    expect((await signIn(other.email)).status).toBe(200)
  })

  it('count unknown accounts alike, so that nobody learns which exist', async () => {
    for (let i = 0; i < 3; i++) expect((await signIn('who@group.example', 'guessing words')).status).toBe(401)
    expect((await signIn('who@group.example', 'guessing words')).status).toBe(429)
  })

  it('forget the tries at an account once its owner signs in', async () => {
    const person = await site.person()
    for (let round = 0; round < 3; round++) {
      expect((await signIn(person.email, 'a slip of the finger')).status).toBe(401)
      expect((await signIn(person.email)).status).toBe(200)
    }
  })

  it('stop tries from one address over many accounts, and are kept in the database', async () => {
    const strict = await startWebSite({
      limits: {
        byAddress: { tries: 4, seconds: 60 },
        byAccount: { tries: 100, seconds: 60 },
        resets: { tries: 100, seconds: 60 },
        tokens: { tries: 2, seconds: 60 },
      },
    })
    try {
      const tryAt = (email: string) =>
        request(strict.listener).post('/api/session').send({ email, password: 'guessing words' })
      for (let i = 0; i < 4; i++) expect((await tryAt(`p${i}@group.example`)).status).toBe(401)
      expect((await tryAt('p9@group.example')).status).toBe(429)
      const { rows } = await strict.database.pool.query<{ key: string }>('select key from rate_limit')
      expect(rows.length).toBeGreaterThan(0)
      expect(JSON.stringify(rows)).not.toMatch(/group\.example|127\.0\.0\.1/)
      const link = () => request(strict.listener).get(`/api/invitations/${'y'.repeat(43)}`)
      expect([(await link()).status, (await link()).status, (await link()).status]).toEqual([410, 410, 429])
    } finally {
      await strict.close()
    }
  })
})

describe('sessions end', () => {
  it('at signing out', async () => {
    const person = await site.person()
    const client = await site.client(person.email)
    await client.delete('/api/session').expect(200)
    expect(await who(client)).toBeNull()
    const { rowCount } = await site.database.pool.query(`select from session where sess ->> 'personId' = $1`, [
      person.id,
    ])
    expect(rowCount).toBe(0)
  })

  it('at once when a person is removed or disabled', async () => {
    const organisation = await site.organisation()
    const promoter = await site.person()
    const organiser = await site.person()
    await site.member(organisation.id, promoter.id, 'promoter')
    await site.member(organisation.id, organiser.id, 'organiser')
    const theirs = await site.client(organiser.email)
    const ours = await site.client(promoter.email)
    await theirs.get(`/api/office/organisations/${organisation.slug}/draws`).expect(200)
    await ours.delete(`/api/office/organisations/${organisation.slug}/people/${organiser.id}`).expect(200)
    expect(await who(theirs)).toBeNull()
    await theirs.get(`/api/office/organisations/${organisation.slug}/draws`).expect(401)
    await site.database.pool.query('update person set disabled_at = now() where id = $1', [promoter.id])
    expect(await who(ours)).toBeNull()
  })

  it('after their longest time, however busy, and after a while of silence', async () => {
    const person = await site.person()
    const client = await site.client(person.email)
    const days = (count: number) =>
      site.database.pool.query(
        `update session set sess = jsonb_set(sess::jsonb, '{startedAt}', to_jsonb($2::bigint)) where sess ->> 'personId' = $1`,
        [person.id, Date.now() - count * 86_400_000],
      )
    await days(2.9)
    expect(await who(client)).toBe(person.email)
    await days(3.1)
    expect(await who(client)).toBeNull()
    const idle = await site.client(person.email)
    await site.database.pool.query(
      `update session set expire = now() - interval '1 second' where sess ->> 'personId' = $1`,
      [person.id],
    )
    expect(await who(idle)).toBeNull()
  })

  it('but for the one in use, when its owner changes the password', async () => {
    const person = await site.person()
    const here = await site.client(person.email)
    const elsewhere = await site.client(person.email)
    const change = (current: string) =>
      here.post('/api/account/password').send({ current, password: 'four quite other words' })
    expect((await change('not the present one')).body.errors).toEqual([
      { field: 'current', message: 'This is not your present password.' },
    ])
    expect(await who(elsewhere)).toBe(person.email)
    expect((await change(PASSWORD)).status).toBe(200)
    expect(await who(here)).toBe(person.email)
    expect(await who(elsewhere)).toBeNull()
    expect((await signIn(person.email)).status).toBe(401)
    expect((await signIn(person.email, 'four quite other words')).status).toBe(200)
  })
})

describe('links by mail', () => {
  it('set a new password once, and end every session', async () => {
    const person = await site.person()
    const client = await site.client(person.email)
    await request(site.listener).post('/api/password-resets').send({ email: person.email }).expect(200, {})
    const mail = await site.accountMail('password-reset')
    expect(mail.to).toBe(person.email)
    const token = tokenOf(mail.link)
    const { rows } = await site.database.pool.query('select * from password_reset')
    expect(JSON.stringify(rows)).not.toContain(token)

    expect((await request(site.listener).get(`/api/password-resets/${token}`)).body).toEqual({ email: person.email })
    const set = (password: string) => request(site.listener).post(`/api/password-resets/${token}`).send({ password })
    expect((await set('too short')).status).toBe(422)
    expect((await set('four quite other words')).status).toBe(200)
    expect(await who(client)).toBeNull()
    expect((await set('and once again another')).status).toBe(410)
    expect((await request(site.listener).get(`/api/password-resets/${token}`)).status).toBe(410)
    expect((await signIn(person.email, 'four quite other words')).status).toBe(200)
  })

  it('are too old after an hour', async () => {
    const person = await site.person()
    await request(site.listener).post('/api/password-resets').send({ email: person.email }).expect(200)
    const token = tokenOf((await site.accountMail('password-reset')).link)
    await site.database.pool.query(
      `update password_reset set created_at = created_at - interval '61 minutes', expires_at = expires_at - interval '61 minutes' where person_id = $1`,
      [person.id],
    )
    const answer = await request(site.listener)
      .post(`/api/password-resets/${token}`)
      .send({ password: 'four quite other words' })
    expect(answer.status).toBe(410)
    expect((await signIn(person.email)).status).toBe(200)
  })

  it('are sent to nobody for an unknown address, with the same answer and about as late', async () => {
    const person = await site.person()
    const timed = async (email: string) => {
      const start = performance.now()
      const answer = await request(site.listener).post('/api/password-resets').send({ email })
      expect([answer.status, answer.body]).toEqual([200, {}])
      return performance.now() - start
    }
    const count = async () =>
      Number((await site.database.pool.query<{ n: string }>('select count(*) as n from mail')).rows[0]?.n)
    const known = await timed(person.email)
    const before = await count()
    const unknown = await timed('nobody-at-all@group.example')
    expect(await count()).toBe(before)
    expect(Math.min(known, unknown)).toBeGreaterThan(200)
    await timed(person.email)
    expect((await request(site.listener).post('/api/password-resets').send({ email: person.email })).status).toBe(429)
  })

  it('bring an invited person in, once', async () => {
    const organisation = await site.organisation()
    const promoter = await site.person()
    await site.member(organisation.id, promoter.id, 'promoter')
    const ours = await site.client(promoter.email)
    const email = 'newcomer@group.example'
    await ours
      .post(`/api/office/organisations/${organisation.slug}/invitations`)
      .send({ email, role: 'organiser' })
      .expect(200)
    const token = tokenOf((await site.accountMail('invitation')).link)
    const newcomer = await site.client()
    expect((await newcomer.get(`/api/invitations/${token}`)).body).toMatchObject({
      organisation: 'Rowan Street Band',
      role: 'organiser',
      knownPerson: false,
    })
    const accept = (body: object) => newcomer.post(`/api/invitations/${token}`).send(body)
    expect((await accept({ name: 'Tove Lind', password: 'short' })).status).toBe(422)
    const accepted = await accept({ name: 'Tove Lind', password: 'four quite other words' })
    expect(accepted.status).toBe(200)
    expect(accepted.body.person).toMatchObject({ name: 'Tove Lind', email })
    expect(await who(newcomer)).toBe(email)
    await newcomer.get(`/api/office/organisations/${organisation.slug}/draws`).expect(200)
    const again = await request(site.listener)
      .post(`/api/invitations/${token}`)
      .send({ password: 'four quite other words' })
    expect(again.status).toBe(410)
  })
})
