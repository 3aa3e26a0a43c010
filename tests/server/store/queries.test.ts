import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { retryJob } from '#server/commands/jobs/retry-job.ts'
import { nameWitness } from '#server/commands/witnesses/name-witness.ts'
import { removeWitness } from '#server/commands/witnesses/remove-witness.ts'
import { stateAsWitness } from '#server/commands/witnesses/state-as-witness.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { lookAround, heartbeat } from '#server/jobs/look-around.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { findOrganisationRow, getSiteState, listAllOrganisations } from '#server/store/queries/administrator.ts'
import { getAudit } from '#server/store/queries/audit.ts'
import { getHome, searchDraws } from '#server/store/queries/draw-cards.ts'
import { getDraw, getPick } from '#server/store/queries/draw-page.ts'
import { getOfficeDraw, listOfficeDraws } from '#server/store/queries/office-draws.ts'
import { getOrganisation, listOrganisations } from '#server/store/queries/organisations.ts'
import { getSealSummary } from '#server/store/queries/seal-summary.ts'
import { draw } from '#server/store/schema/draw.ts'
import { membership, organisation, person } from '#server/store/schema/people.ts'
import { getSiteState as siteStateEndpoint } from '#shared/schemas/api/administrator.ts'
import { getOfficeDraw as officeDrawEndpoint } from '#shared/schemas/api/office.ts'
import { getDraw as drawEndpoint, getPick as pickEndpoint } from '#shared/schemas/api/public.ts'
import { makeClosed, makeDraft, makeOffice, makeOpen, makeSealed, type Office } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
const ALL = { edit: true, run: true, witness: true }
let site: TestSite
let office: Office
let watcher: { readonly id: string; readonly name: string }
const ids = { draft: '', open: '', closed: '', sealed: '', drawn: '' }
beforeAll(async () => {
  site = await startTestSite({ clock })
  const { services } = site
  office = await makeOffice(services, { demo: true })
  const [made] = await services.db
    .insert(person)
    .values({ email: 'witness@people.example', name: 'Ruth Amery' })
    .returning()
  if (!made) throw new Error('not made')
  watcher = made
  await services.db
    .insert(membership)
    .values({ organisationId: office.organisationId, personId: made.id, role: 'witness' })
  ids.drawn = await makeSealed(services, office, { title: 'Drawn draw' })
  await nameWitness(services, office.promoter, {
    draw: ids.drawn,
    name: 'Ruth Amery',
    role: 'Neighbour',
    connection: 'None',
    person: made.id,
  })
  clock.advance(3600_000)
  await settleDraw(services, goOn, { draw: ids.drawn })
  ids.draft = await makeDraft(services, office, { title: 'Draft draw' })
  ids.open = await makeOpen(services, office, { title: 'Open draw' })
  ids.closed = await makeClosed(services, office, { title: 'Closed draw' })
  ids.sealed = await makeSealed(services, office, { title: 'Sealed draw', goodCause: 'Hymn_books' })
}, 60_000)
afterAll(() => site.close())

const slugOf = async (id: string) =>
  (await site.services.db.select({ slug: draw.slug }).from(draw).where(eq(draw.id, id)))[0]?.slug ?? ''

describe('public reads', () => {
  it('show each draw where it belongs, and drafts nowhere', async () => {
    const home = await getHome(site.services.db)
    expect(home.upcoming.map(({ title }) => title)).toEqual(['Sealed draw'])
    expect(home.recent.map(({ title }) => title)).toEqual(['Drawn draw'])
    expect(home.open.map(({ title }) => title).sort()).toEqual(['Closed draw', 'Open draw'])
    expect(await getDraw(site.services, await slugOf(ids.draft))).toBeNull()
    const page = await getOrganisation(site.services.db, office.organisation)
    expect(page?.draws.map(({ title }) => title).sort()).toEqual([
      'Closed draw',
      'Drawn draw',
      'Open draw',
      'Sealed draw',
    ])
  })
  it('tell how many entered only from the seal on', async () => {
    const { items } = await searchDraws(site.services.db, { q: '', state: 'all', page: 1 })
    const counts = Object.fromEntries(items.map(({ title, entrants, tickets }) => [title, [entrants, tickets]]))
    expect(counts).toEqual({
      'Open draw': [null, null],
      'Closed draw': [null, null],
      'Sealed draw': [4, 11],
      'Drawn draw': [4, 11],
    })
  })
  it('find by words and state', async () => {
    const titles = async (q: string, state: 'all' | 'sealed' = 'all') =>
      (await searchDraws(site.services.db, { q, state, page: 1 })).items.map(({ title }) => title)
    expect(await titles('SEALED')).toEqual(['Sealed draw'])
    expect(await titles('hymn_b')).toEqual(['Sealed draw'])
    expect(await titles('_pen')).toEqual([])
    expect((await titles('quarry lane')).length).toBe(4)
    expect(await titles('', 'sealed')).toEqual(['Sealed draw'])
    expect(await searchDraws(site.services.db, { q: '', state: 'all', page: 2 })).toMatchObject({ items: [], total: 4 })
  })
  it('answer in the shapes of the API, with coins that add up', async () => {
    for (const id of [ids.open, ids.closed, ids.sealed, ids.drawn]) {
      drawEndpoint.response.parse(await getDraw(site.services, await slugOf(id)))
    }
    const slug = await slugOf(ids.drawn)
    const page = drawEndpoint.response.parse(await getDraw(site.services, slug))
    const { picks, flips } = page.result ?? { picks: [], flips: null }
    expect(picks[0]).toMatchObject({
      remaining: 11,
      award: { kind: 'prize', prize: 'p1', item: 1, of: 2, position: 1 },
    })
    expect(picks[1]?.remaining).toBe(11 - (picks[0]?.ticketsIn ?? 0))
    expect(flips?.flips).toBe(picks.flatMap(({ coins }) => coins).reduce((sum, coin) => sum + coin[2].length, 0))
    expect(page.spread).toMatchObject({ kind: 'leaves', winners: [picks[0]?.leaf, picks[1]?.leaf] })
    const last = pickEndpoint.response.parse(await getPick(site.services, { slug, pick: 2 }))
    expect(last).toMatchObject({
      next: null,
      previous: { pick: 1 },
      pick: { award: { kind: 'reserve', reserve: 1 }, label: null },
    })
    expect(await getPick(site.services, { slug, pick: 3 })).toBeNull()
    expect(await getPick(site.services, { slug: await slugOf(ids.sealed), pick: 0 })).toBeNull()
  })
  it('keep an organisation that waits for approval to itself, and mark a suspended one', async () => {
    const other = await makeOffice(site.services)
    const set = (state: 'pending' | 'suspended') =>
      site.services.db.update(organisation).set({ state }).where(eq(organisation.id, other.organisationId))
    await set('pending')
    expect(await getOrganisation(site.services.db, other.organisation)).toBeNull()
    expect((await listOrganisations(site.services.db, { q: '', page: 1 })).items.map(({ slug }) => slug)).not.toContain(
      other.organisation,
    )
    // Four of the five are public.
    expect((await listOrganisations(site.services.db, { q: '', page: 1 })).items).toMatchObject([
      { slug: office.organisation, draws: 4 },
    ])
    const draft = await makeDraft(site.services, other)
    const listed = async () => (await listOfficeDraws(site.services, { organisation: other.organisation }))?.draws
    expect(await listed()).toHaveLength(1)
    await set('suspended')
    expect(await listed()).toEqual([])
    expect(await getOfficeDraw(site.services, { draw: draft, rights: ALL })).toBeNull()
    expect(await getOrganisation(site.services.db, other.organisation)).toMatchObject({ suspended: true })
  })
})

describe('office reads', () => {
  it('say what may be done in each state, and nothing to somebody without rights', async () => {
    const may = async (id: string, rights = ALL) => {
      const view = officeDrawEndpoint.response.parse(await getOfficeDraw(site.services, { draw: id, rights }))
      return Object.entries(view.may).flatMap(([name, allowed]) => (allowed ? [name] : []))
    }
    expect(await may(ids.draft)).toEqual(['edit', 'open', 'cancel'])
    expect(await may(ids.open)).toEqual(['changeEntrants', 'close', 'postpone', 'cancel'])
    expect(await may(ids.closed)).toEqual(['reopen', 'seal', 'postpone', 'cancel'])
    expect(await may(ids.sealed)).toEqual(['replaceSeal', 'postpone', 'cancel', 'state'])
    expect(await may(ids.drawn)).toEqual(['state'])
    for (const id of Object.values(ids)) expect(await may(id, { edit: false, run: false, witness: false })).toEqual([])
    const start = clock.now()
    clock.advance(3600_000)
    expect(await may(ids.sealed)).toEqual(['state'])
    clock.set(start)
  })
  it('leave out the jobs that wait for a time that does not matter any more', async () => {
    const waiting = async (id: string) =>
      (await getOfficeDraw(site.services, { draw: id, rights: ALL }))?.jobs
        .filter(({ state }) => state === 'waiting')
        .map(({ kind }) => kind)
    expect(await waiting(ids.open)).toContain('close')
    expect(await waiting(ids.closed)).not.toContain('close')
    expect(await waiting(ids.sealed)).toContain('settle')
    expect(await waiting(ids.drawn)).not.toContain('settle')
  })
  it('narrow the list to the draws that a witness watches', async () => {
    const all = await listOfficeDraws(site.services, { organisation: office.organisation })
    expect(all?.draws.map(({ title, waiting }) => [title, waiting])).toContainEqual(['Closed draw', 'Seal the list.'])
    expect(all?.draws).toHaveLength(5)
    expect(all?.draws.map(({ prizes }) => prizes)).toEqual([2, 2, 2, 2, 2])
    expect(Object.fromEntries(all?.draws.map(({ state, waiting }) => [state, waiting]) ?? [])).toMatchObject({
      draft: 'Open it for entries when you are ready.',
      open: null,
    })
    const watched = await listOfficeDraws(site.services, { organisation: office.organisation, witnessedBy: watcher.id })
    expect(watched?.draws.map(({ title }) => title)).toEqual(['Drawn draw'])
  })
  it('summarise what a seal would fix, with its cautions', async () => {
    const summary = await getSealSummary(site.services, ids.closed)
    expect(summary).toMatchObject({
      entrants: 4,
      tickets: 11,
      withoutEmail: 2,
      items: 2,
      reserves: 1,
      problems: [],
      replaces: null,
    })
    expect(summary?.cautions).toHaveLength(2)
    expect((await getSealSummary(site.services, ids.draft))?.problems).toEqual(['Open the draw for entries first.'])
  })
  it('show a witness’s statement, which is made once and about what they saw', async () => {
    const slug = await slugOf(ids.drawn)
    const digest = (await getDraw(site.services, slug))?.result?.digest ?? ''
    const say = (about: 'seal' | 'result', verdict: 'confirmed' | 'refused', words: string | null) =>
      stateAsWitness(site.services, watcher, { draw: ids.drawn, about, digest, verdict, words })
    await expect(say('seal', 'confirmed', null)).rejects.toThrow('is another one by now')
    await expect(say('result', 'refused', null)).rejects.toThrow('Say in a sentence why you refuse')
    await say('result', 'refused', 'I was not let into the hall.')
    await expect(say('result', 'confirmed', null)).rejects.toThrow('already')
    const page = await getDraw(site.services, slug)
    expect(page?.witnesses).toMatchObject([
      {
        name: 'Ruth Amery',
        statements: [{ about: 'result', verdict: 'refused', words: 'I was not let into the hall.', digest }],
      },
    ])
    expect(page?.state).toBe('drawn')
    const view = await getOfficeDraw(site.services, { draw: ids.drawn, rights: ALL })
    expect(view?.statements).toMatchObject([{ witness: 'Ruth Amery', verdict: 'refused' }])
    const off = removeWitness(site.services, office.promoter, {
      draw: ids.drawn,
      witness: view?.witnesses[0]?.id ?? '',
    })
    await expect(off).rejects.toThrow('This draw is drawn')
  })
  it('find events of the audit trail by words and actor', async () => {
    const { items } = await getAudit(site.services.db, { q: 'odile', page: 1, draw: ids.sealed })
    expect(items.map(({ action }) => action).slice(0, 2)).toEqual(['draw.seal', 'draw.close'])
    expect(await getAudit(site.services.db, { q: 'no such words', page: 1 })).toMatchObject({ total: 0 })
    expect((await getAudit(site.services.db, { q: '', page: 1, organisation: 'elsewhere' })).total).toBe(0)
  })
})

describe('what an administrator sees of an organisation', () => {
  it('is counts and states', async () => {
    const counts = { people: 2, draws: { draft: 1, open: 1, closed: 1, sealed: 1, drawn: 1 } }
    expect(await findOrganisationRow(site.services.db, office.organisation)).toMatchObject(counts)
    const { items } = await listAllOrganisations(site.services.db, { q: office.organisation, state: 'all', page: 1 })
    expect(items).toMatchObject([counts])
  })
})

describe('the state of the site', () => {
  it('tells of services, overdue draws and failed jobs, which can be tried again', async () => {
    const { services } = site
    await heartbeat(services, 'one', clock.now())
    site.beacon.behave({ mode: 'down' })
    await lookAround(services)
    const job = (
      await services.pool.query<{ id: string }>(
        `update pgboss.job set state = 'failed', completed_on = now(), output = '{"message":"The store is away."}'
         where name = 'archive' and data ->> 'draw' = $1 returning id`,
        [ids.drawn],
      )
    ).rows[0]?.id as string
    const start = clock.now()
    clock.advance(3600_000 + 120_000)
    const state = siteStateEndpoint.response.parse(await getSiteState(services))
    clock.set(start)
    expect(state).toMatchObject({
      mail: { reachable: true },
      store: { reachable: true, locked: true, bucket: 'evenpenny' },
      beacon: { network: 'development', relays: [{ ok: false, round: null }] },
      timestamps: {
        authorities: [{ ok: true, detail: 'It gave a timestamp, signed by Development timestamps - worthless.' }],
        waiting: 0,
      },
      witnesses: [],
      overdue: [{ title: 'Sealed draw' }],
    })
    expect(state.jobs.failed).toMatchObject([
      { id: job, kind: 'archive', error: 'The store is away.', draw: { title: 'Drawn draw' } },
    ])
    await retryJob(services, office.promoter, { job })
    expect((await services.pool.query('select state from pgboss.job where id = $1', [job])).rows).toEqual([
      { state: 'retry' },
    ])
    await expect(retryJob(services, office.promoter, { job })).rejects.toThrow('no such failed job')
  })
})
