import { and, eq } from 'drizzle-orm'
import { simpleParser } from 'mailparser'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { jobHandlers } from '#server/jobs/handlers.ts'
import { prepareMail } from '#server/jobs/mail/prepare-mail.ts'
import { sendMail } from '#server/jobs/mail/send-mail.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { sweep } from '#server/jobs/sweep.ts'
import { getDraw } from '#server/store/queries/draw-page.ts'
import { getImport } from '#server/store/queries/imports.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrantPerson } from '#server/store/schema/entrant.ts'
import { mail } from '#server/store/schema/operation.ts'
import { logEvent } from '#server/store/schema/record.ts'
import { sealSecret } from '#server/store/schema/seal.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { makeClosed, makeOffice, makeSealed, type Office, versionOf } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite({ clock })
  office = await makeOffice(site.services, { demo: true })
})
afterAll(() => site.close())

const live = async (queue: string, drawId: string) =>
  (
    await site.services.pool.query(
      `select from pgboss.job where name = $1 and data ->> 'draw' = $2 and state in ('created', 'retry', 'active')`,
      [queue, drawId],
    )
  ).rowCount
const lose = (drawId: string) => site.services.pool.query(`delete from pgboss.job where data ->> 'draw' = $1`, [drawId])
const mailsOf = (drawId: string) => site.services.db.select().from(mail).where(eq(mail.drawId, drawId))
/** Subject and text of the newest mail to an address. */
async function newest(to: string): Promise<{ subject: string; text: string }> {
  const found = site.mail.store.list(to).reduce((a, b) => (a.number > b.number ? a : b))
  const parsed = await simpleParser(site.mail.store.raw(found))
  return { subject: parsed.subject ?? '', text: parsed.text ?? '' }
}

describe('the sweep', () => {
  it('finds a due draw whose job was lost, once, and lets others be', async () => {
    const due = await makeSealed(site.services, office)
    const later = await makeSealed(site.services, office, { drawAtDate: new Date(clock.now().getTime() + 7200_000) })
    await lose(due)
    await lose(later)
    clock.advance(3600_000 + 11_000)
    await Promise.all([sweep(site.services), sweep(site.services)])
    expect([await live('settle', due), await live('settle', later)]).toEqual([1, 0])
    await settleDraw(site.services, goOn, { draw: due })
    await lose(due)
    await sweep(site.services)
    expect(await live('archive', due)).toBe(0)
    clock.advance(11_000)
    await sweep(site.services)
    expect([await live('settle', due), await live('archive', due)]).toEqual([0, 1])
  })
})

describe('an upload whose process is gone', () => {
  it('is given up after ten minutes without a sign of life, and no sooner', async () => {
    const id = await makeClosed(site.services, office)
    const left = async (minutes: number) => {
      const { rows } = await site.services.pool.query<{ id: string }>(
        `insert into entrant_import (draw_id, file_name, bytes_total, created_at, touched_at)
         values ($1, 'list.csv', 9, now(), clock_timestamp() - make_interval(mins => $2)) returning id`,
        [id, minutes],
      )
      return rows[0]?.id as string
    }
    const [lost, alive] = [await left(11), await left(9)]
    await sweep(site.services)
    const state = async (of: string) => (await getImport(site.services.db, { draw: id, import: of }))?.state
    expect([await state(lost), await state(alive)]).toEqual(['failed', 'reading'])
  })
})

describe('a round that nobody can show', () => {
  it('leaves the draw waiting for seven days and then failed, its seed destroyed', async () => {
    const id = await makeSealed(site.services, office, { title: 'Unlucky draw' })
    const start = clock.now().getTime() + 3600_000
    site.beacon.behave({ mode: 'down' })
    const { settle } = jobHandlers(site.services, goOn)
    clock.set(new Date(start + 1000))
    expect(await settle({ draw: id })).toMatchObject({ kind: 'again' })
    clock.set(new Date(start + 7 * 24 * 3600_000 - 60_000))
    expect(await settle({ draw: id })).toMatchObject({ kind: 'again' })
    clock.set(new Date(start + 7 * 24 * 3600_000 + 3000))
    expect(await settle({ draw: id })).toEqual({ kind: 'done' })
    const [row] = await site.services.db.select().from(draw).where(eq(draw.id, id))
    expect(row?.state).toBe('failed')
    const seal = sealInForce(await sealsOf(site.services.db, id))
    const [secret] = await site.services.db
      .select()
      .from(sealSecret)
      .where(eq(sealSecret.sealId, seal?.id ?? 0))
    expect(secret?.seed).toBeNull()
    const page = await getDraw(site.services, row?.slug ?? '')
    expect(page?.history.at(-1)).toMatchObject({
      event: 'failed',
      digest: seal?.digest,
      note: expect.stringContaining('seven days'),
    })
    // The beacon comes back too late: nothing happens any more.
    site.beacon.behave({ mode: 'right' })
    expect(await settleDraw(site.services, goOn, { draw: id })).toEqual({ kind: 'over' })
    const [event] = await site.services.db
      .select()
      .from(logEvent)
      .where(and(eq(logEvent.drawId, id), eq(logEvent.event, 'failed')))
    await prepareMail(site.services, goOn, { draw: id, about: 'notice', logIndex: event?.index ?? -1 })
    await sendMail(site.services, goOn)
    expect((await newest('ada@people.example')).subject).toBe('This draw could not be held: Unlucky draw')
  })
})

describe('notices', () => {
  const noticeOf = async (id: string, event: 'postponed' | 'cancelled') => {
    const [row] = await site.services.db
      .select()
      .from(logEvent)
      .where(and(eq(logEvent.drawId, id), eq(logEvent.event, event)))
    for (let i = 0; i < 2; i += 1)
      await prepareMail(site.services, goOn, { draw: id, about: 'notice', logIndex: row?.index ?? -1 })
    await sendMail(site.services, goOn)
  }
  it('tell everybody with an address of a postponed and a cancelled draw, with the reason, once', async () => {
    const id = await makeClosed(site.services, office, { title: 'Movable draw' })
    const drawAt = localFromInstant(new Date(clock.now().getTime() + 48 * 3600_000), 'Europe/London')
    const input = { draw: id, version: await versionOf(site.services, id), reason: 'Snow.', drawAt }
    await postponeDraw(site.services, office.promoter, input)
    await noticeOf(id, 'postponed')
    const told = await newest('cleo@people.example')
    expect(told.subject).toBe('Postponed: Movable draw')
    expect(told.text).toContain('The reason given: Snow.')
    await cancelDraw(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'More snow.',
      title: 'Movable draw',
    })
    await noticeOf(id, 'cancelled')
    expect((await newest('ada@people.example')).text).toContain('The reason given: More snow.')
    expect((await mailsOf(id)).map(({ kind }) => kind).sort()).toEqual([
      'cancelled',
      'cancelled',
      'postponed',
      'postponed',
    ])
  })
  it('are dropped for somebody who was erased, and say nothing of a reason that was taken down', async () => {
    const id = await makeClosed(site.services, office, { title: 'Quiet draw' })
    await cancelDraw(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'Names somebody.',
      title: 'Quiet draw',
    })
    const [row] = await site.services.db
      .select()
      .from(logEvent)
      .where(and(eq(logEvent.drawId, id), eq(logEvent.event, 'cancelled')))
    await prepareMail(site.services, goOn, { draw: id, about: 'notice', logIndex: row?.index ?? -1 })
    await site.services.db
      .delete(entrantPerson)
      .where(and(eq(entrantPerson.drawId, id), eq(entrantPerson.email, 'ada@people.example')))
    await site.services.pool.query('delete from log_note where log_index = $1', [row?.index])
    await sendMail(site.services, goOn)
    expect((await mailsOf(id)).map(({ state }) => state).sort()).toEqual(['dropped', 'sent'])
    const told = await newest('cleo@people.example')
    expect(told.subject).toBe('Cancelled: Quiet draw')
    expect(told.text).not.toContain('reason')
  })
})

describe('a seal that is replaced', () => {
  it('drops receipts that still wait, and sends new ones that say so', async () => {
    const id = await makeSealed(site.services, office, { title: 'Twice sealed' })
    await prepareMail(site.services, goOn, { draw: id, about: 'seal' })
    const before = sealInForce(await sealsOf(site.services.db, id))?.digest ?? ''
    const drawAt = localFromInstant(new Date(clock.now().getTime() + 48 * 3600_000), 'Europe/London')
    await postponeDraw(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'Fog.',
      drawAt,
    })
    await prepareMail(site.services, goOn, { draw: id, about: 'seal' })
    await sendMail(site.services, goOn)
    expect((await mailsOf(id)).map(({ state }) => state).sort()).toEqual(['dropped', 'dropped', 'sent', 'sent'])
    const { subject, text } = await newest('ada@people.example')
    expect(subject).toBe('Your entry is sealed anew: Twice sealed')
    expect(text).toContain(before.slice(0, 8))
    expect(text).toContain(sealInForce(await sealsOf(site.services.db, id))?.digest ?? '?')
  })
})
