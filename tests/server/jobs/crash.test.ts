import { and, eq, inArray } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { CommandError } from '#server/commands/command-error.ts'
import { CRASH_POINTS } from '#server/jobs/crash-points.ts'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { createServices, type Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'
import { mail } from '#server/store/schema/operation.ts'
import { archive, result } from '#server/store/schema/result.ts'
import { logEvent } from '#server/store/schema/record.ts'
import { makeOffice, makeSealed, type Office } from '#tests/support/draws.ts'
import { checkPublicArchive } from '#tests/support/public-archive.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'
import { holdBack, startWorker, stopWorker, until, type Worker } from '#tests/support/worker-process.ts'

/** Entrants with an address in each draw: Ada and Cleo. Each gets a seal mail at once and a result mail after the draw. */
const ADDRESSES = 2

let site: TestSite
let office: Office
let past: Services & { close(): Promise<void> }
const clock = settableClock(new Date())

beforeAll(async () => {
  site = await startTestSite()
  // Draws whose time has come already: sealed two hours ago, by a clock that only demo draws obey.
  past = createServices(site.config, { name: 'evenpenny past', clock, jobExpirySeconds: 3 })
  office = await makeOffice(past, { demo: true })
}, 60_000)
afterAll(async () => {
  await past.close()
  await site.close()
})

/** A draw whose round came an hour ago; nothing is settled yet. */
async function overdueDraw(title: string): Promise<string> {
  const drawAt = new Date(Math.floor(Date.now() / 60_000) * 60_000 - 3600_000)
  for (let attempt = 1; ; attempt += 1) {
    clock.set(new Date(drawAt.getTime() - 3600_000))
    try {
      return await makeSealed(past, office, { title, drawAtDate: drawAt })
    } catch (error) {
      // Its closing time has long passed by the workers' clock: on a slow machine their sweep may close it before its
      // entrants are in. That draw is of no use here; another is made.
      if (!(error instanceof CommandError) || attempt === 5) throw error
    }
  }
}

async function expectOnce(drawId: string): Promise<void> {
  const { db } = site.services
  const [row] = await db.select().from(draw).where(eq(draw.id, drawId))
  expect(row?.state).toBe('drawn')
  expect(await db.select().from(result).where(eq(result.drawId, drawId))).toHaveLength(1)
  const events = await db.select().from(logEvent).where(eq(logEvent.drawId, drawId))
  expect(events.filter(({ event }) => event === 'drawn')).toHaveLength(1)
  const stored = await db.select().from(archive).where(eq(archive.drawId, drawId))
  expect(stored).toHaveLength(1)
  const objects: string[] = []
  for await (const { key } of site.services.store.list(`proofs/${row?.slug}/`)) objects.push(key)
  expect(objects).toEqual([stored[0]?.key])
  expect(await checkPublicArchive(site, drawId)).toMatchObject({ ok: true })
}

/** The mails that sealing and settling cause: one of each to everybody with an address. */
const mailsOf = (drawId: string) =>
  site.services.db
    .select()
    .from(mail)
    .where(and(eq(mail.drawId, drawId), inArray(mail.kind, ['seal', 'result', 'won'])))

/** How many times the mail server took each mail of a draw. */
async function deliveries(drawId: string): Promise<{ readonly kind: string; readonly count: number }[]> {
  const rows = await mailsOf(drawId)
  expect(rows.map(({ state }) => state)).toEqual(rows.map(() => 'sent'))
  const taken = site.mail.store.list('')
  return rows.map(({ kind, messageId }) => ({ kind, count: taken.filter((one) => one.messageId === messageId).length }))
}

/** The Message-IDs that the mail server took more than once, of whatever kind. */
function repeatedMails(): readonly string[] {
  const counts = new Map<string, number>()
  for (const { messageId } of site.mail.store.list('')) counts.set(messageId, (counts.get(messageId) ?? 0) + 1)
  return [...counts].filter(([, count]) => count > 1).map(([messageId]) => messageId)
}

async function finished(drawId: string): Promise<boolean> {
  const { db } = site.services
  const stored = await db.select().from(archive).where(eq(archive.drawId, drawId))
  const mails = await mailsOf(drawId)
  return stored.length === 1 && mails.length === 2 * ADDRESSES && mails.every(({ state }) => state === 'sent')
}

let survivor: Worker
beforeAll(async () => {
  survivor = startWorker(site, null)
  await survivor.ready
}, 60_000)
afterAll(() => stopWorker(survivor))

/** A settle job more than there should be, so that both workers have the draw in hand at the same time. */
const enqueueTwice = (drawId: string) => past.queue.enqueue(site.services.pool, 'settle', { draw: drawId })

describe('two workers race, and one is killed (kill -9)', () => {
  it.each(CRASH_POINTS)(
    'after: %s',
    async (point) => {
      const doomed = startWorker(site, point)
      await doomed.ready
      let dead = false
      doomed.ended.then(() => {
        dead = true
      })
      const draws: string[] = []
      const before = new Set(repeatedMails())
      let letGo = () => {}
      try {
        while (!dead && draws.length < 8) {
          // Which of the two comes to the point in a race is chance. From the second draw on the other one is held back
          // for a while, so that it is this one's turn.
          letGo()
          if (draws.length > 0) letGo = holdBack(survivor)
          const drawId = await overdueDraw(`Draw ${draws.length + 1} with a crash at ${point}`)
          await enqueueTwice(drawId)
          draws.push(drawId)
          await until(`${point}: a draw is finished, or a worker dead`, async () => dead || (await finished(drawId)))
        }
        expect(dead, 'the worker came to the point').toBe(true)
        expect(await doomed.ended).toBe('SIGKILL')
      } finally {
        doomed.process.kill('SIGKILL')
        letGo()
      }
      for (const drawId of draws) {
        await until(`${point}: every draw is finished`, () => finished(drawId))
        await expectOnce(drawId)
      }
      const counts = (await Promise.all(draws.map(deliveries))).flat()
      expect(counts).toHaveLength(draws.length * ADDRESSES * 2)
      // Between the mail server's yes and the mark nothing can be known: a mail on its way when its worker dies goes out
      // again, with the Message-ID that it had. That is one mail at most, and none of the result before it is settled.
      const repeated = counts.filter(({ count }) => count !== 1)
      // It may be a mail of another kind that was on its way: an entrant's private link.
      if (point === 'mail-accepted') expect(repeatedMails().filter((id) => !before.has(id))).toHaveLength(1)
      expect(repeated.length).toBeLessThanOrEqual(1)
      expect(repeated.every(({ count }) => count === 2)).toBe(true)
      if (CRASH_POINTS.indexOf(point) <= CRASH_POINTS.indexOf('settling-committed')) {
        expect(repeated.filter(({ kind }) => kind !== 'seal')).toEqual([])
      }
    },
    240_000,
  )
})
