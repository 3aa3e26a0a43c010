import { createHash } from 'node:crypto'
import { eq } from 'drizzle-orm'
import request from 'supertest'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { closeDraw } from '#server/commands/draws/close-draw.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { sealDraw } from '#server/commands/draws/seal-draw.ts'
import { printSlips } from '#server/commands/entries/print-slips.ts'
import { addEntrant } from '#server/commands/entrants/add-entrant.ts'
import { removeEntrant } from '#server/commands/entrants/remove-entrant.ts'
import { updateEntrant } from '#server/commands/entrants/update-entrant.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { privateLink } from '#server/jobs/mail/private-link.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrantPerson } from '#server/store/schema/entrant.ts'
import { entryCode, entryToken } from '#server/store/schema/entry.ts'
import { mail, mailContent } from '#server/store/schema/operation.ts'
import { resultPick } from '#server/store/schema/result.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { checkReceipt, parseReceipt } from '#shared/protocol/receipt.ts'
import { parseSeal } from '#shared/protocol/seal.ts'
import { entryView, entryWalk, type EntryPick, type EntryView } from '#shared/schemas/api/entry.ts'
import { CountTree } from '#shared/sampling/walk.ts'
import { makeOffice, makeOpen, type Office, versionOf } from '#tests/support/draws.ts'
import { entrantNamed, entryMails, sendMails } from '#tests/support/entries.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'

const DRAW_AT = '2026-03-02T18:00:00Z'
const clock = settableClock(new Date('2026-03-02T10:00:00Z'))
const LIMITS = {
  byAddress: { tries: 6, seconds: 60 },
  codes: { tries: 100, seconds: 60 },
  linksByAddress: { tries: 50, seconds: 60 },
  linksByMail: { tries: 2, seconds: 60 },
  links: { tries: 100, seconds: 60 },
  writes: { tries: 500, seconds: 60 },
}

let site: WebSite
let office: Office
let made = 0
beforeAll(async () => {
  site = await startWebSite({ entryLimits: LIMITS }, {}, clock)
  office = await makeOffice(site.services, { demo: true })
})
afterAll(() => site.close())
beforeEach(async () => {
  clock.set(new Date('2026-03-02T10:00:00Z'))
  await site.database.pool.query('delete from rate_limit')
})

interface Made {
  readonly id: string
  readonly slug: string
  /** Of Ada, who holds 5 tickets and has an address of her own. */
  readonly ada: string
  readonly token: string
}

/** An open draw in which Ada has had her first mail. */
async function opened(rule: 'one-prize-each' | 'every-ticket' = 'one-prize-each'): Promise<Made> {
  made += 1
  const ada = `ada${made}@people.example`
  const entrants = [
    `Ada Quill,5,${ada},1-5`,
    'Bram Osei,1,,6',
    `Cleo Ferrant,3,cleo${made}@people.example,7-9`,
    'Dov Halloran,2,,',
  ]
  const id = await makeOpen(site.services, office, { drawAtDate: new Date(DRAW_AT), entrants, rule, reserves: 3 })
  await sendMails(site, id, 'entry')
  const [row] = await site.services.db.select({ slug: draw.slug }).from(draw).where(eq(draw.id, id))
  return { id, slug: row?.slug ?? '', ada, token: (await entryMails(site, ada))[0]?.token ?? '' }
}

async function seal(id: string): Promise<void> {
  await closeDraw(site.services, office.promoter, { draw: id, version: await versionOf(site.services, id) })
  const [row] = await site.services.db.select().from(draw).where(eq(draw.id, id))
  if (!row) throw new Error('no draw')
  const { version, entrantCount: entrants, ticketCount: tickets } = row
  await sealDraw(site.services, office.promoter, { draw: id, version, entrants, tickets })
}

async function settle(id: string): Promise<void> {
  clock.set(new Date(Date.parse(DRAW_AT) + 4000))
  expect(await settleDraw(site.services, goOn, { draw: id })).toEqual({ kind: 'drawn' })
}

const api = () => request(site.listener)
const see = async (token: string): Promise<EntryView> => {
  const answer = await api().get(`/api/entry/${token}`).expect(200)
  return entryView.parse(answer.body)
}

describe('the private link', () => {
  it('goes out once to everybody with an address, and opens their own entry', async () => {
    const { id, ada, token } = await opened()
    await sendMails(site, id, 'entry')
    const mails = await entryMails(site, ada)
    expect(mails.map(({ subject }) => subject)).toEqual(['You are entered: Winter hamper draw'])
    expect(await see(token)).toMatchObject({
      name: 'Ada Quill',
      label: 'Ada Q.',
      tickets: 5,
      numbers: '1-5',
      contact: ada,
      sealed: null,
      result: null,
      draw: {
        title: 'Winter hamper draw',
        state: 'open',
        tickets: 11,
        entrants: 4,
        terms: 'One ticket, one chance.\n',
      },
    })
    await addEntrant(site.services, office.promoter, {
      draw: id,
      entrant: {
        name: 'Eno Farr',
        tickets: 1,
        label: null,
        email: `eno${made}@people.example`,
        phone: null,
        numbers: null,
      },
    })
    await sendMails(site, id)
    const [late] = await entryMails(site, `eno${made}@people.example`)
    expect((await see(late?.token ?? '')).name).toBe('Eno Farr')
    expect(await entryMails(site, ada)).toHaveLength(1)
  })

  it('is stored as a hash only, and never logged', async () => {
    const { token } = await opened()
    const rows = await site.services.db.select().from(entryToken)
    expect(rows.map(({ tokenHash }) => tokenHash)).toContain(createHash('sha256').update(token).digest('hex'))
    expect(await site.services.db.select().from(mailContent)).toEqual([])
    const dump = await site.database.pool.query<{ row: string }>(
      `select to_jsonb(t)::text as row from entry_token t union all select to_jsonb(m)::text from mail m
       union all select to_jsonb(d)::text from audit_detail d`,
    )
    expect(dump.rows.filter(({ row }) => row.includes(token))).toEqual([])
    await api().get(`/entry/${token}?page=2`).expect(200)
    await api().get(`/api/entry/${token}`).expect(200)
    await api().get(`/entry/${token}/receipt.json`).expect(404)
    await api().put(`/api/entry/${token}/announcement`).send({ choice: 'nonsense' }).expect(422)
    expect(site.log()).toContain('/entry/…')
    expect(site.log()).not.toContain(token)
  })

  it('is kept by no cache, told to no other page and in no search', async () => {
    const { token } = await opened()
    for (const path of [`/entry/${token}`, '/entry', `/entry/${token}/receipt.json`]) {
      const { headers } = await api().get(path)
      expect(headers['cache-control'], path).toBe('no-store')
      expect(headers['referrer-policy'], path).toBe('no-referrer')
      expect(headers['x-robots-tag'], path).toContain('noindex')
    }
    expect((await api().get('/robots.txt')).text).toContain('Disallow: /entry/')
  })

  it('is the same however often its mail is tried, and another one in every mail', async () => {
    const { id, token } = await opened()
    const { id: entrantId } = await entrantNamed(site, id, 'Ada Quill')
    const [row] = await site.services.db.select().from(mail).where(eq(mail.entrantId, entrantId))
    if (!row) throw new Error('no mail')
    const again = await privateLink(site.services, row)
    expect(await privateLink(site.services, row)).toBe(again)
    expect(again).toMatch(new RegExp(`^${site.services.site.origin}/entry/[\\w-]{43}$`))
    expect(again).not.toContain(token)
    await site.services.db.delete(mailContent)
  })

  it('answers everything that fits nobody alike, and at last not at all', async () => {
    const answers = []
    for (const token of ['x'.repeat(43), 'A'.repeat(43), '%00', '..%2f..%2fetc']) {
      const { status, body } = await api().get(`/api/entry/${token}`)
      answers.push({ status, title: (body as { title: string }).title })
    }
    expect(new Set(answers.map((answer) => JSON.stringify(answer))).size).toBe(1)
    expect(answers[0]).toEqual({ status: 410, title: 'This link does not work' })
    await api()
      .get(`/api/entry/${'y'.repeat(43)}`)
      .expect(410)
    await api()
      .get(`/api/entry/${'y'.repeat(43)}`)
      .expect(410)
    await api()
      .get(`/api/entry/${'y'.repeat(43)}`)
      .expect(429)
    // A right link never waits for what others tried.
    const { token } = await opened()
    await see(token)
  })

  it('ends with the entrant, with their details, and where their address was wrong', async () => {
    const { id, token, ada } = await opened()
    const { id: entrantId, version } = await entrantNamed(site, id, 'Ada Quill')
    const values = { name: 'Ada Quill', tickets: 5, label: 'Ada Q.', email: ada, phone: null, numbers: '1-5' }
    await updateEntrant(site.services, office.promoter, { draw: id, entrant: entrantId, version, values })
    await sendMails(site, id)
    expect(await entryMails(site, ada), 'no second mail for a change of anything else').toHaveLength(1)
    await see(token)
    const right = `right-${ada}`
    const moved = { ...values, email: right }
    await updateEntrant(site.services, office.promoter, {
      draw: id,
      entrant: entrantId,
      version: version + 1,
      values: moved,
    })
    await sendMails(site, id)
    await api().get(`/api/entry/${token}`).expect(410)
    const [sent] = await entryMails(site, right)
    await see(sent?.token ?? '')
    await removeEntrant(site.services, office.promoter, { draw: id, entrant: entrantId, reason: 'Paid back' })
    await api().get(`/api/entry/${sent?.token}`).expect(410)

    const other = await opened()
    await seal(other.id)
    await settle(other.id)
    const { id: erased } = await entrantNamed(site, other.id, 'Ada Quill')
    await site.services.db.delete(entrantPerson).where(eq(entrantPerson.entrantId, erased))
    await api().get(`/api/entry/${other.token}`).expect(410)
    expect(await site.services.db.select().from(entryToken).where(eq(entryToken.entrantId, erased))).toEqual([])
  })

  it('is sent again for the asking, with the same answer whether the address is known', async () => {
    const { id, ada, token } = await opened()
    const known = await api().post('/api/entry-links').send({ email: ada.toUpperCase() }).expect(200)
    const unknown = await api().post('/api/entry-links').send({ email: 'nobody@people.example' }).expect(200)
    expect(known.body).toEqual(unknown.body)
    await sendMails(site, id)
    const mails = await entryMails(site, ada)
    expect(mails.map(({ subject }) => subject).sort()).toEqual([
      'You are entered: Winter hamper draw',
      'Your private link: Winter hamper draw',
    ])
    for (const one of mails) expect((await see(one.token ?? '')).contact).toBe(ada)
    expect(new Set([token, ...mails.map((one) => one.token)]).size).toBe(2)
    await api().post('/api/entry-links').send({ email: ada }).expect(200)
    await api().post('/api/entry-links').send({ email: ada }).expect(429)
    await api().post('/api/entry-links').send({ email: 'not an address' }).expect(422)
  })
})

describe('how an entrant is announced', () => {
  const choose = (token: string, choice: string) => api().put(`/api/entry/${token}/announcement`).send({ choice })

  it('is theirs to choose until the list is closed, and is what gets sealed', async () => {
    const { id, token } = await opened()
    const { id: entrant, code } = await entrantNamed(site, id, 'Ada Quill')
    expect((await see(token)).announcement).toEqual({
      choice: 'label',
      words: { label: 'Ada Q.', initials: 'A. Q.', code: `Entrant ${code}` },
      open: true,
    })
    const answer = await choose(token, 'code').expect(200)
    expect(answer.body).toMatchObject({ label: `Entrant ${code}`, announcement: { choice: 'code' } })
    await choose(token, 'initials').expect(200)
    // The office changes something else, then the words behind the choice: the choice stands.
    const { version } = await entrantNamed(site, id, 'Ada Quill')
    const values = { name: 'Ada Quill', tickets: 4, label: 'A. Q.', email: null, phone: null, numbers: null }
    await updateEntrant(site.services, office.promoter, { draw: id, entrant, version, values })
    expect(await entrantNamed(site, id, 'Ada Quill')).toMatchObject({
      person: { label: 'A. Q.', givenLabel: 'Ada Q.' },
    })
    const renamed = { ...values, name: 'Ada Quince', label: 'Ada Quince, Otterford' }
    await updateEntrant(site.services, office.promoter, { draw: id, entrant, version: version + 1, values: renamed })
    const [slip] = (await printSlips(site.services, office.promoter, { draw: id, who: { entrant }, after: null })).slips
    const mine = slip?.code ?? ''
    expect((await see(mine)).announcement.words).toMatchObject({ label: 'Ada Quince, Otterford', initials: 'A. Q.' })
    await choose(mine, 'label').expect(200)
    expect(await see(mine)).toMatchObject({ label: 'Ada Quince, Otterford', announcement: { choice: 'label' } })
    await choose(mine, 'initials').expect(200)
    await seal(id)
    await choose(mine, 'label').expect(409)
    const sealed = await see(mine)
    expect(sealed).toMatchObject({ label: 'A. Q.', announcement: { open: false } })
    expect(JSON.parse(sealed.sealed?.receipt ?? '')).toMatchObject({ label: 'A. Q.' })
  })
})

describe('a correction', () => {
  const ask = (token: string, words: string) => api().post(`/api/entry/${token}/corrections`).send({ words })

  it('lands in the office, is answered once, and the answer is mailed and shown', async () => {
    const { id, token, ada } = await opened()
    await ask(token, '  ').expect(422)
    await ask(token, 'My name is Ada Quillon.').expect(200)
    const person = await site.person()
    await site.member(office.organisationId, person.id, 'organiser')
    const organiser = await site.client(person.email)
    const list = await organiser.get(`/api/office/draws/${id}/corrections`).expect(200)
    const { items, open } = list.body as { open: number; items: { id: string; words: string; mayAnswer: boolean }[] }
    expect({ open, items }).toMatchObject({ open: 1, items: [{ words: 'My name is Ada Quillon.', mayAnswer: true }] })
    const path = `/api/office/draws/${id}/corrections/${items[0]?.id}`
    await organiser.post(path).send({ verdict: 'maybe', words: 'Done.' }).expect(422)
    await organiser.post(path).send({ verdict: 'done', words: 'Your name is right now.' }).expect(200)
    await organiser.post(path).send({ verdict: 'refused', words: 'No.' }).expect(409)
    await sendMails(site, id)
    const mails = await entryMails(site, ada)
    const answer = mails.find(({ subject }) => subject === 'Corrected: Winter hamper draw')
    expect(answer?.text).toContain('Your name is right now.')
    expect((await see(answer?.token ?? '')).corrections).toMatchObject({
      items: [{ state: 'done', answer: 'Your name is right now.', words: 'My name is Ada Quillon.' }],
      refusal: null,
    })
  })

  it('goes to the promoter after the seal, and is refused from the draw time', async () => {
    const { id, token } = await opened()
    await seal(id)
    await ask(token, 'I hold six tickets.').expect(200)
    const organiser = await site.person()
    await site.member(office.organisationId, organiser.id, 'organiser')
    const promoter = await site.person()
    await site.member(office.organisationId, promoter.id, 'promoter')
    const listOf = async (email: string) => {
      const client = await site.client(email)
      const { body } = await client.get(`/api/office/draws/${id}/corrections`).expect(200)
      const [item] = (body as { items: { id: string; mayAnswer: boolean; afterSeal: boolean }[] }).items
      return { client, item, path: `/api/office/draws/${id}/corrections/${item?.id}` }
    }
    const first = await listOf(organiser.email)
    expect(first.item).toMatchObject({ mayAnswer: false, afterSeal: true })
    await first.client.post(first.path).send({ verdict: 'done', words: 'Yes.' }).expect(409)
    const second = await listOf(promoter.email)
    expect(second.item).toMatchObject({ mayAnswer: true })
    await second.client.post(second.path).send({ verdict: 'refused', words: 'The stub says five.' }).expect(200)
    clock.set(new Date(DRAW_AT))
    await ask(token, 'Once more.').expect(409)
    expect((await see(token)).corrections.refusal).toMatch(/^The draw time has come/)
  })

  it('waits in a short row: five open requests are enough', async () => {
    const { token } = await opened()
    for (let i = 0; i < 5; i += 1) await ask(token, `Request ${i}`).expect(200)
    await ask(token, 'Request 6').expect(409)
  })
})

describe('the receipt', () => {
  it('leads to the public seal, is counted once when opened before the draw, and changes with a new seal', async () => {
    const { id, slug, token, ada } = await opened()
    await seal(id)
    await sendMails(site, id, 'seal')
    const [sealMail] = (await entryMails(site, ada)).filter(({ subject }) =>
      subject?.startsWith('Your entry is sealed'),
    )
    await see(sealMail?.token ?? '')
    const publicSeal = await api().get(`/draws/${slug}/seal.json`).expect(200)
    const bytes = utf8(JSON.stringify(publicSeal.body))
    const parsed = unwrap(parseSeal(bytes, { allowDevelopmentChain: true }))
    const digest = createHash('sha256').update(bytes).digest('hex')
    const downloaded = await api().get(`/entry/${token}/receipt.json`).expect(200)
    const view = await see(token)
    expect(view.sealed).toMatchObject({ digest, receipt: downloaded.text, replaced: [] })
    const receipt = unwrap(parseReceipt(utf8(downloaded.text)))
    expect(receipt).toMatchObject({ kind: 'receipt', tickets: 5, label: 'Ada Q.', identity: { name: 'Ada Quill' } })
    expect(checkReceipt(sha256, receipt, parsed, digest)).toEqual({ ok: true, value: true })
    const short = await api().get(`/entry/${token}/short-proof.json`).expect(200)
    expect(short.text).not.toContain('Ada')
    const proof = unwrap(parseReceipt(utf8(short.text)))
    expect(checkReceipt(sha256, proof, parsed, digest)).toEqual({ ok: true, value: true })

    const count = async () =>
      ((await api().get(`/api/draws/${slug}`)).body as { receiptsOpened: number }).receiptsOpened
    expect(await count()).toBe(1)
    await api().post(`/api/entry/${token}/openings`).send({}).expect(200)
    expect(await count()).toBe(1)
    clock.advance(60_000)
    await postponeDraw(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'The hall is flooded.',
      drawAt: localFromInstant(new Date('2026-03-02T20:00:00Z'), 'Europe/London'),
    })
    const anew = await see(token)
    expect(anew.sealed?.replaced).toEqual([
      { digest, sealedAt: '2026-03-02T10:00:00Z', reason: 'The hall is flooded.' },
    ])
    expect(anew.sealed?.digest).not.toBe(digest)
    expect(checkReceipt(sha256, receipt, parsed, anew.sealed?.digest ?? '')).toMatchObject({ ok: false })
    expect(await count()).toBe(0)
    clock.set(new Date('2026-03-02T20:00:00Z'))
    await api().post(`/api/entry/${token}/openings`).send({}).expect(200)
    expect(await count()).toBe(0)
  })
})

describe('what happened at each pick', () => {
  it.each(['one-prize-each', 'every-ticket'] as const)('is what the whole list says, by the rule %s', async (rule) => {
    const { id, token } = await opened(rule)
    await seal(id)
    await settle(id)
    const { slips } = await printSlips(site.services, office.promoter, { draw: id, who: 'everybody', after: null })
    const everybody = await Promise.all(
      slips.map(async ({ code }) => {
        const { body } = await api().get(`/api/entry/${code}/picks`).expect(200)
        return { code, view: await see(code), picks: (body as { items: EntryPick[] }).items }
      }),
    )
    // The list in the order of its leaves, its picks taken out one after the other: the other way to the same figures.
    const byLeaf = [...everybody].sort((a, b) => (a.view.sealed?.leaf ?? 0) - (b.view.sealed?.leaf ?? 0))
    const tree = new CountTree(byLeaf.map(({ view }) => view.tickets))
    const rows = await site.services.db
      .select()
      .from(resultPick)
      .where(eq(resultPick.drawId, id))
      .orderBy(resultPick.pick)
    expect(rows.length).toBeGreaterThan(3)
    for (const { pick, leaf } of rows) {
      const remaining = tree.remaining
      for (const [index, one] of byLeaf.entries()) {
        const told = one.picks[pick]
        expect(told).toMatchObject({ pick, mine: tree.ticketsOf(index), remaining })
        expect(told?.turnedAt === null).toBe(index === leaf)
        const walk = entryWalk.parse((await api().get(`/api/entry/${one.code}/picks/${pick}`).expect(200)).body)
        expect(walk.walk[0]).toMatchObject({
          mine: tree.ticketsOf(index),
          total: remaining,
          before: byLeaf.slice(0, index).reduce((sum, _, earlier) => sum + tree.ticketsOf(earlier), 0),
        })
        expect(walk.walk.at(-1)?.kept).toBe(index === leaf)
      }
      tree.remove(leaf, rule)
    }
    const won = byLeaf.map(({ view }) => view.result?.won.map(({ pick }) => pick))
    expect(won).toEqual(byLeaf.map((_, index) => rows.filter(({ leaf }) => leaf === index).map(({ pick }) => pick)))
    await sendMails(site, id, 'result')
    await api().get(`/api/entry/${token}/picks/999`).expect(404)
  })

  it('is not told before the draw', async () => {
    const { id, token } = await opened()
    await seal(id)
    await api().get(`/api/entry/${token}/picks`).expect(404)
    await api().get(`/api/entry/${token}/picks/0`).expect(404)
  })
})

describe('slips', () => {
  const type = (code: string) => api().post('/api/entry-codes').send({ code })

  it('carry a code that opens one entry, and is kept as a keyed hash only', async () => {
    const { id } = await opened()
    const person = await site.person()
    await site.member(office.organisationId, person.id, 'organiser')
    const client = await site.client(person.email)
    const print = await client
      .post(`/api/office/draws/${id}/slips`)
      .send({ who: 'without-email', after: null })
      .expect(200)
    const { slips, more } = print.body as Awaited<ReturnType<typeof printSlips>>
    expect(more).toBe(false)
    expect(slips.map(({ name, tickets }) => [name, tickets])).toEqual([
      ['Bram Osei', 1],
      ['Dov Halloran', 2],
    ])
    const code = slips[0]?.code ?? ''
    const typed = code.toLowerCase().replace(/(.{4})(?=.)/g, '$1 - ')
    expect((await type(typed).expect(200)).body).toEqual({ code })
    expect((await see(code)).name).toBe('Bram Osei')
    const rows = await site.services.db.select().from(entryCode)
    // No plain hash of the code: whoever has the database alone cannot try codes out.
    expect(rows.some(({ codeHash }) => codeHash === createHash('sha256').update(code).digest('hex'))).toBe(false)
    expect(rows.some(({ codeHash }) => codeHash === site.services.slipCodes.of(code))).toBe(true)
    expect(site.log()).not.toContain(code)
    // Codes of an earlier printing go on working.
    await printSlips(site.services, office.promoter, { draw: id, who: 'without-email', after: null })
    expect((await see(code)).name).toBe('Bram Osei')
  })

  it('name the group that is mistyped, without a word on whether the code exists', async () => {
    const { id } = await opened()
    const { slips } = await printSlips(site.services, office.promoter, { draw: id, who: 'everybody', after: null })
    const code = slips[0]?.code ?? ''
    const wrong = (text: string, at: number) => text.slice(0, at) + (text[at] === '7' ? '8' : '7') + text.slice(at + 1)
    const real = await type(wrong(code, 5)).expect(422)
    expect(real.body).toMatchObject({
      errors: [{ field: 'code', message: expect.stringMatching(/^The second group looks/) }],
    })
    const none = await type(wrong('KKKKKKKKKKKKKKKK', 5)).expect(422)
    expect(none.body).toMatchObject({ errors: [{ field: 'code', message: expect.stringContaining('mistyped') }] })
    const path = await api()
      .get(`/api/entry/${wrong(code, 0)}`)
      .expect(410)
    expect((path.body as { detail: string }).detail).toMatch(/^The first group looks mistyped/)
  })

  it('cannot be found by trying', async () => {
    const { id } = await opened()
    const { slips } = await printSlips(site.services, office.promoter, { draw: id, who: 'everybody', after: null })
    const others = await printSlips(site.services, office.promoter, { draw: id, who: 'everybody', after: null })
    await site.services.db
      .delete(entryCode)
      .where(eq(entryCode.codeHash, site.services.slipCodes.of(slips[0]?.code ?? '')))
    for (let i = 0; i < 20; i += 1) await type(others.slips[0]?.code ?? '').expect(200)
    for (let i = 0; i < LIMITS.byAddress.tries; i += 1) await type(slips[0]?.code ?? '').expect(422)
    await type(slips[0]?.code ?? '').expect(429)
    await api().get(`/api/entry/${slips[0]?.code}`).expect(429)
  })

  it('are printed in batches, each entrant once', async () => {
    const { id } = await opened()
    const rows = Array.from({ length: 405 }, (_, n) => ({ name: `Entrant ${n}`, tickets: 1 }))
    for (const row of rows) {
      await addEntrant(site.services, office.promoter, {
        draw: id,
        entrant: { ...row, label: null, email: null, phone: null, numbers: null },
      })
    }
    const first = await printSlips(site.services, office.promoter, { draw: id, who: 'everybody', after: null })
    const after = Number(first.slips.at(-1)?.entrant)
    const second = await printSlips(site.services, office.promoter, { draw: id, who: 'everybody', after })
    expect([first.slips.length, first.more, second.slips.length, second.more]).toEqual([400, true, 9, false])
    expect(new Set([...first.slips, ...second.slips].map(({ entrant }) => entrant)).size).toBe(409)
  })
})

it('has the link of one entrant sent again from the office, where they have an address', async () => {
  const { id, ada } = await opened()
  const person = await site.person()
  await site.member(office.organisationId, person.id, 'organiser')
  const client = await site.client(person.email)
  const { id: entrant } = await entrantNamed(site, id, 'Ada Quill')
  await client.post(`/api/office/draws/${id}/entrants/${entrant}/link`).send({}).expect(200)
  const { id: without } = await entrantNamed(site, id, 'Bram Osei')
  await client.post(`/api/office/draws/${id}/entrants/${without}/link`).send({}).expect(409)
  await sendMails(site, id)
  expect((await entryMails(site, ada)).map(({ subject }) => subject)).toContain('Your private link: Winter hamper draw')
})
