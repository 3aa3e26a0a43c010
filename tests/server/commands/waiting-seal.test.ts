import { eq } from 'drizzle-orm'
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import { hexBytes } from '#shared/bytes/hex.ts'
import { DEVELOPMENT_AUTHORITY, DEVELOPMENT_AUTHORITY_PEM } from '#shared/timestamp/development-authority.ts'
import { verifyTimestamp } from '#shared/timestamp/verify-timestamp.ts'
import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { completeSealing } from '#server/commands/draws/complete-sealing.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { reopenDraw } from '#server/commands/draws/reopen-draw.ts'
import { sealDraw } from '#server/commands/draws/seal-draw.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { jobHandlers } from '#server/jobs/handlers.ts'
import { sweep } from '#server/jobs/sweep.ts'
import { getAudit } from '#server/store/queries/audit.ts'
import { getDraw } from '#server/store/queries/draw-page.ts'
import { getOfficeDraw } from '#server/store/queries/office-draws.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { waitingSealing } from '#server/store/queries/sealings.ts'
import { draw } from '#server/store/schema/draw.ts'
import { logEvent } from '#server/store/schema/record.ts'
import { sealedLeaf, sealedLeafPerson, sealing, sealSecret } from '#server/store/schema/seal.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { makeClosed, makeOffice, makeSealed, type Office, versionOf } from '#tests/support/draws.ts'
import { settableClock, startTestSite, type TestSite } from '#tests/support/site.ts'
import { opensslVerifies } from '#tests/support/timestamp/openssl-authority.ts'

const clock = settableClock(new Date('2026-10-02T09:00:00Z'))
let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite({ clock })
  office = await makeOffice(site.services, { demo: true })
}, 60_000)
afterAll(() => site.close())
afterEach(() => site.timestamp.behave({ mode: 'right' }))

const rowOf = async (id: string) => (await site.services.db.select().from(draw).where(eq(draw.id, id)))[0]
const events = async (id: string) =>
  (await site.services.db.select().from(logEvent).where(eq(logEvent.drawId, id)).orderBy(logEvent.index)).map(
    ({ event }) => event,
  )
const officeDraw = (id: string) =>
  getOfficeDraw(site.services, { draw: id, rights: { edit: true, run: true, witness: false } })
const liveJobs = async (queue: string, id: string) =>
  (
    await site.services.pool.query(
      `select from pgboss.job where name = $1 and data ->> 'draw' = $2 and state in ('created', 'retry')`,
      [queue, id],
    )
  ).rowCount
const sealMails = async (id: string) =>
  (
    await site.services.pool.query(
      `select from pgboss.job where name = 'prepare-mail' and data ->> 'draw' = $1 and data ->> 'about' = 'seal'`,
      [id],
    )
  ).rowCount
const seal = async (id: string) => {
  const row = await rowOf(id)
  if (!row) throw new Error('no draw')
  const { version, entrantCount: entrants, ticketCount: tickets } = row
  return sealDraw(site.services, office.promoter, { draw: id, version, entrants, tickets })
}
const postpone = async (id: string, hours: number) =>
  postponeDraw(site.services, office.promoter, {
    draw: id,
    version: await versionOf(site.services, id),
    reason: 'The hall is not free.',
    drawAt: localFromInstant(new Date(((await rowOf(id))?.drawAt.getTime() ?? 0) + hours * 3600_000), 'Europe/London'),
  })
/** Rows of seals that do not count, anywhere. */
const leftovers = async () => {
  const { rows } = await site.services.pool.query(
    `select (select count(*)::int from sealing where id not in (select id from seal)) as sealings,
       (select count(*)::int from sealed_leaf where seal_id not in (select id from seal)) as leaves,
       (select count(*)::int from sealed_leaf_person where seal_id not in (select id from seal)) as people,
       (select count(*)::int from seal_secret where seal_id not in (select id from seal)) as secrets`,
  )
  return rows[0] as Record<string, number>
}
const NOTHING = { sealings: 0, leaves: 0, people: 0, secrets: 0 }

describe('a seal and its timestamp', () => {
  it('counts at once where the authority answers, with a timestamp that OpenSSL verifies over seal.json', async () => {
    const id = await makeSealed(site.services, office, { title: 'Stamped' })
    const row = sealInForce(await sealsOf(site.services.db, id))
    if (!row?.timestamp) throw new Error('no timestamp')
    expect(opensslVerifies(row.bytes, row.timestamp, DEVELOPMENT_AUTHORITY_PEM)).toBe(true)
    const asked = { imprint: hexBytes(row.digest, 32), trusted: [DEVELOPMENT_AUTHORITY] }
    expect(verifyTimestamp(row.timestamp, asked)).toMatchObject({
      ok: true,
      value: { info: { genTime: clock.now().getTime() / 1000 } },
    })
    expect((await getDraw(site.services, (await rowOf(id))?.slug ?? ''))?.seal?.timestamp).toEqual({
      at: '2026-10-02T09:00:00Z',
      authority: 'Development timestamps - worthless',
    })
  })

  it('waits where it does not, unseen by the public, and counts as soon as it does', async () => {
    site.timestamp.behave({ mode: 'down' })
    const id = await makeClosed(site.services, office, { title: 'Waiting' })
    expect(await seal(id)).toEqual({ kind: 'sealing' })
    expect(await rowOf(id)).toMatchObject({ state: 'closed', sealedAt: null })
    expect(await sealsOf(site.services.db, id)).toEqual([])
    expect(await events(id)).not.toContain('sealed')
    expect(await liveJobs('timestamp', id)).toBe(1)
    expect([await liveJobs('settle', id), await sealMails(id)]).toEqual([0, 0])
    expect((await getDraw(site.services, (await rowOf(id))?.slug ?? ''))?.seal).toBeNull()
    const seen = await officeDraw(id)
    expect(seen?.sealing).toMatchObject({
      replaces: null,
      tries: 1,
      detail: expect.stringContaining('cannot be reached'),
      until: '2026-10-02T09:59:30Z',
    })
    expect(seen?.may.seal).toBe(false)
    await expect(seal(id)).rejects.toThrow(/its seal waits for its timestamp/)

    const { timestamp } = jobHandlers(site.services, goOn)
    expect(await timestamp({ draw: id })).toMatchObject({ kind: 'again' })
    expect((await officeDraw(id))?.sealing?.tries).toBe(2)
    clock.advance(60_000)
    site.timestamp.behave({ mode: 'right' })
    const made = await waitingSealing(site.services.db, id)
    expect(await timestamp({ draw: id })).toEqual({ kind: 'done' })
    const row = sealInForce(await sealsOf(site.services.db, id))
    expect(row).toMatchObject({ digest: made?.digest, timestampAt: clock.now() })
    expect(row?.sealedAt).toEqual(new Date(clock.now().getTime() - 60_000))
    expect(await rowOf(id)).toMatchObject({ state: 'sealed' })
    expect((await events(id)).filter((event) => event === 'sealed')).toHaveLength(1)
    expect([await liveJobs('settle', id), await sealMails(id)]).toEqual([1, 1])
    expect((await officeDraw(id))?.sealing).toBeNull()
    const audit = await getAudit(site.services.db, { draw: id, q: '', page: 1 })
    expect(audit.items.find(({ action }) => action === 'draw.seal')).toMatchObject({ actor: office.promoter.name })
    expect(await timestamp({ draw: id })).toEqual({ kind: 'done' })
    expect(await sealsOf(site.services.db, id)).toHaveLength(1)
  })

  it('counts once, however many ask at the same time', async () => {
    site.timestamp.behave({ mode: 'down' })
    const id = await makeClosed(site.services, office, { title: 'Raced' })
    await seal(id)
    site.timestamp.behave({ mode: 'right' })
    const outcomes = await Promise.all(Array.from({ length: 5 }, () => completeSealing(site.services, { draw: id })))
    expect(outcomes.map(({ kind }) => kind).sort()).toEqual(['counts', 'none', 'none', 'none', 'none'])
    expect((await events(id)).filter((event) => event === 'sealed')).toHaveLength(1)
    expect(await liveJobs('settle', id)).toBe(1)
  })

  it('has its job again after a queue that lost it', async () => {
    site.timestamp.behave({ mode: 'down' })
    const id = await makeClosed(site.services, office, { title: 'Lost' })
    await seal(id)
    await site.services.pool.query(`delete from pgboss.job where name = 'timestamp'`)
    await sweep(site.services)
    expect(await liveJobs('timestamp', id)).toBe(0)
    clock.advance(11_000)
    await sweep(site.services)
    await sweep(site.services)
    expect(await liveJobs('timestamp', id)).toBe(1)
    site.timestamp.behave({ mode: 'right' })
    await completeSealing(site.services, { draw: id })
  })

  it.each([['lie'], ['refuse']] as const)('takes nothing from an authority that would %s', async (mode) => {
    site.timestamp.behave({ mode })
    const id = await makeClosed(site.services, office, { title: `Not by a ${mode}` })
    expect(await seal(id)).toEqual({ kind: 'sealing' })
    expect(await sealsOf(site.services.db, id)).toEqual([])
  })
})

describe('a seal that got no timestamp in time', () => {
  it('is discarded whole, and the office told; the list can be sealed again for a later time', async () => {
    site.timestamp.behave({ mode: 'right' })
    for (const { drawId } of await site.services.db.select().from(sealing))
      await completeSealing(site.services, { draw: drawId })
    site.timestamp.behave({ mode: 'down' })
    const id = await makeClosed(site.services, office, { title: 'Too late' })
    await seal(id)
    const start = clock.now()
    const drawAt = (await rowOf(id))?.drawAt ?? start
    const { timestamp } = jobHandlers(site.services, goOn)
    clock.set(new Date(drawAt.getTime() - 31_000))
    expect(await timestamp({ draw: id })).toMatchObject({ kind: 'again' })
    clock.set(new Date(drawAt.getTime() - 29_000))
    site.timestamp.behave({ mode: 'right' })
    expect(await timestamp({ draw: id })).toEqual({
      kind: 'given-up',
      reason: expect.stringMatching(/^No timestamp authority gave a timestamp in time.*Postpone the draw/),
    })
    expect(await leftovers()).toEqual(NOTHING)
    expect(await rowOf(id)).toMatchObject({ state: 'closed' })
    const audit = await getAudit(site.services.db, { draw: id, q: '', page: 1 })
    expect(audit.items[0]?.sentence).toMatch(/^Discarded a seal that had no timestamp yet: No timestamp authority/)
    await postpone(id, 2)
    expect(await seal(id)).toEqual({ kind: 'sealed' })
    clock.set(start)
  })

  it.each([
    ['cancelled', 'cancelled'],
    ['reopened', 'open'],
    ['postponed', 'closed'],
  ] as const)('is discarded when the draw is %s meanwhile', async (what, state) => {
    site.timestamp.behave({ mode: 'down' })
    const id = await makeClosed(site.services, office, { title: `Waiting, then ${what}` })
    await seal(id)
    const version = await versionOf(site.services, id)
    const reason = 'The hall is not free.'
    if (what === 'cancelled') {
      await cancelDraw(site.services, office.promoter, { draw: id, version, reason, title: `Waiting, then ${what}` })
    } else if (what === 'postponed') await postpone(id, 1)
    else {
      const closesAt = localFromInstant(new Date(clock.now().getTime() + 20 * 60_000), 'Europe/London')
      await reopenDraw(site.services, office.promoter, { draw: id, version, reason, closesAt })
    }
    expect((await rowOf(id))?.state).toBe(state)
    expect(await leftovers()).toEqual(NOTHING)
    site.timestamp.behave({ mode: 'right' })
    expect(await completeSealing(site.services, { draw: id })).toEqual({ kind: 'none' })
    expect((await rowOf(id))?.state).toBe(state)
  })
})

describe('a seal that replaces another', () => {
  it('leaves the old one in force until it has its timestamp', async () => {
    const id = await makeSealed(site.services, office, { title: 'Replaced slowly' })
    const before = sealInForce(await sealsOf(site.services.db, id))
    site.timestamp.behave({ mode: 'down' })
    await postpone(id, 1)
    expect(sealInForce(await sealsOf(site.services.db, id))?.digest).toBe(before?.digest)
    expect((await rowOf(id))?.drawAt).toEqual(before?.drawAt)
    expect(await events(id)).not.toContain('replaced')
    const secret = async () =>
      (
        await site.services.db
          .select()
          .from(sealSecret)
          .where(eq(sealSecret.sealId, before?.id ?? 0))
      )[0]
    expect((await secret())?.seed).not.toBeNull()
    expect((await officeDraw(id))?.sealing).toMatchObject({ replaces: before?.digest })
    site.timestamp.behave({ mode: 'right' })
    expect(await completeSealing(site.services, { draw: id })).toEqual({ kind: 'counts' })
    const now = sealInForce(await sealsOf(site.services.db, id))
    expect(now).toMatchObject({ supersedes: before?.digest, added: 0, removed: 0, changed: 0 })
    expect((await secret())?.seed).toBeNull()
    expect((await events(id)).slice(-2)).toEqual(['postponed', 'replaced'])
  })

  it('is discarded when the round of the old one comes first: that one is drawn', async () => {
    const id = await makeSealed(site.services, office, { title: 'Overtaken' })
    const before = sealInForce(await sealsOf(site.services.db, id))
    site.timestamp.behave({ mode: 'down' })
    await postpone(id, 1)
    const start = clock.now()
    clock.set(before?.beaconRoundAt ?? start)
    site.timestamp.behave({ mode: 'right' })
    expect(await completeSealing(site.services, { draw: id })).toMatchObject({
      kind: 'discarded',
      reason: expect.stringContaining('that one stands'),
    })
    expect(await leftovers()).toEqual(NOTHING)
    const { settle } = jobHandlers(site.services, goOn)
    clock.advance(4000)
    expect(await settle({ draw: id })).toEqual({ kind: 'done' })
    expect((await rowOf(id))?.state).toBe('drawn')
    clock.set(start)
  })

  it('counts the entrants that were added, removed and changed', async () => {
    const id = await makeSealed(site.services, office, { title: 'Corrected' })
    // No list can be changed under a seal today; this is what one looks like after it was.
    const client = await site.services.pool.connect()
    try {
      await client.query('begin')
      await client.query(`set local session_replication_role = replica`)
      const of = `entrant_id in (select entrant_id from entrant_person where draw_id = $1 and name = $2)`
      await client.query(`delete from entrant_numbers where ${of}`, [id, 'Bram Osei'])
      await client.query(
        `delete from entrant where id in (select entrant_id from entrant_person where draw_id = $1 and name = $2)`,
        [id, 'Bram Osei'],
      )
      await client.query(`delete from entrant_person where draw_id = $1 and name = $2`, [id, 'Bram Osei'])
      await client.query(
        `update entrant set tickets = 4 where id in (select entrant_id from entrant_person where draw_id = $1 and name = $2)`,
        [id, 'Cleo Ferrant'],
      )
      await client.query(`update entrant_person set label = 'D. Halloran' where draw_id = $1 and name = $2`, [
        id,
        'Dov Halloran',
      ])
      for (const code of ['AAAA2222', 'AAAA3333', 'AAAA4444']) {
        await client.query(
          `with added as (insert into entrant (draw_id, code, tickets, source, added_at) values ($1, $2, 1, 'by-hand', now()) returning id)
           insert into entrant_person (entrant_id, draw_id, name, label) select id, $1, $2, $2 from added`,
          [id, code],
        )
      }
      await client.query(
        `update draw set entrant_count = (select count(*) from entrant where draw_id = $1),
           ticket_count = (select sum(tickets) from entrant where draw_id = $1) where id = $1`,
        [id],
      )
      await client.query('commit')
    } finally {
      client.release()
    }
    await postpone(id, 1)
    expect(sealInForce(await sealsOf(site.services.db, id))).toMatchObject({ added: 3, removed: 1, changed: 2 })
    const page = await getDraw(site.services, (await rowOf(id))?.slug ?? '')
    expect(page?.seal?.changes).toEqual({ added: 3, removed: 1, changed: 2 })
    expect(page?.replacedSeals[0]?.changes).toBeNull()
    const people = await site.services.db.select().from(sealedLeafPerson)
    expect(people.length).toBe((await site.services.db.select().from(sealedLeaf)).length)
  })
})
