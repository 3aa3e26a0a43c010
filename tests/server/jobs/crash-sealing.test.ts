import { and, eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { sealDraw } from '#server/commands/draws/seal-draw.ts'
import { SEALING_POINTS } from '#server/jobs/crash-points.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { waitingSealing } from '#server/store/queries/sealings.ts'
import { draw } from '#server/store/schema/draw.ts'
import { mail } from '#server/store/schema/operation.ts'
import { logEvent } from '#server/store/schema/record.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { makeClosed, makeOffice, makeSealed, type Office, versionOf } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'
import { holdBack, startWorker, stopWorker, until, type Worker } from '#tests/support/worker-process.ts'

/** Entrants with an address in each draw: Ada and Cleo. */
const ADDRESSES = 2

let site: TestSite
let office: Office
let survivor: Worker
beforeAll(async () => {
  site = await startTestSite()
  office = await makeOffice(site.services)
  survivor = startWorker(site, null)
  await survivor.ready
}, 90_000)
afterAll(async () => {
  await stopWorker(survivor)
  await site.close()
})

/** A closed draw whose seal waits for its timestamp, and two jobs that want to get it. */
async function waitingDraw(title: string): Promise<string> {
  const drawAtDate = new Date(Math.ceil(Date.now() / 60_000 + 60) * 60_000)
  const id = await makeClosed(site.services, office, { title, drawAtDate })
  const [row] = await site.services.db.select().from(draw).where(eq(draw.id, id))
  const { version = 0, entrantCount: entrants = 0, ticketCount: tickets = 0 } = row ?? {}
  site.timestamp.behave({ mode: 'down' })
  try {
    expect(await sealDraw(site.services, office.promoter, { draw: id, version, entrants, tickets })).toEqual({
      kind: 'sealing',
    })
  } finally {
    site.timestamp.behave({ mode: 'right' })
  }
  return id
}

/** A sealed draw that is postponed, and whose new seal waits. */
async function waitingReplacement(title: string): Promise<string> {
  const drawAtDate = new Date(Math.ceil(Date.now() / 60_000 + 60) * 60_000)
  const id = await makeSealed(site.services, office, { title, drawAtDate })
  site.timestamp.behave({ mode: 'down' })
  try {
    await postponeDraw(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'The hall is not free.',
      drawAt: localFromInstant(new Date(drawAtDate.getTime() + 3600_000), 'Europe/London'),
    })
  } finally {
    site.timestamp.behave({ mode: 'right' })
  }
  expect(await waitingSealing(site.services.db, id)).not.toBeNull()
  return id
}

async function finished(id: string): Promise<boolean> {
  const seal = sealInForce(await sealsOf(site.services.db, id))
  if (!seal || (await waitingSealing(site.services.db, id))) return false
  const mails = await site.services.db.select().from(mail).where(eq(mail.sealId, seal.id))
  return mails.filter(({ state }) => state === 'sent').length === ADDRESSES
}

/** One seal that counts, one log event of it, one job to settle it, and one mail to each address. */
async function expectOnce(id: string, event: 'sealed' | 'replaced', seals: number): Promise<void> {
  const { db, pool } = site.services
  const rows = await sealsOf(db, id)
  expect(rows).toHaveLength(seals)
  const seal = sealInForce(rows)
  const logged = await db
    .select()
    .from(logEvent)
    .where(and(eq(logEvent.drawId, id), eq(logEvent.event, event)))
  expect(logged.map(({ digest }) => digest)).toEqual([seal?.digest])
  const settling = await pool.query(
    `select from pgboss.job where name = 'settle' and data ->> 'draw' = $1 and start_after = $2`,
    [id, seal?.beaconRoundAt],
  )
  expect(settling.rowCount).toBe(1)
  const mails = await db
    .select()
    .from(mail)
    .where(eq(mail.sealId, seal?.id ?? 0))
  expect(mails.map(({ kind }) => kind)).toEqual(['seal', 'seal'])
  expect(
    mails.every(({ messageId }) => site.mail.store.list('').filter((one) => one.messageId === messageId).length > 0),
  ).toBe(true)
}

describe('two workers race for a timestamp, and one is killed (kill -9)', () => {
  it.each(SEALING_POINTS)(
    'after: %s',
    async (point) => {
      const doomed = startWorker(site, point)
      await doomed.ready
      let dead = false
      doomed.ended.then(() => {
        dead = true
      })
      const first: string[] = []
      const replaced: string[] = []
      let letGo = () => {}
      try {
        for (let turn = 0; !dead && turn < 8; turn += 1) {
          // From the second draw on the other worker is held back, so that it is this one's turn.
          letGo()
          if (turn > 0) letGo = holdBack(survivor)
          const replacing = turn % 2 === 1
          const make = replacing ? waitingReplacement : waitingDraw
          const id = await make(`Draw ${turn + 1} with a crash at ${point}`)
          await site.services.queue.enqueue(site.services.pool, 'timestamp', { draw: id })
          if (replacing) replaced.push(id)
          else first.push(id)
          await until(`${point}: a draw is sealed, or a worker dead`, async () => dead || (await finished(id)))
        }
        expect(dead, 'the worker came to the point').toBe(true)
        expect(await doomed.ended).toBe('SIGKILL')
      } finally {
        doomed.process.kill('SIGKILL')
        letGo()
      }
      for (const id of [...first, ...replaced]) await until(`${point}: every draw is sealed`, () => finished(id))
      for (const id of first) await expectOnce(id, 'sealed', 1)
      for (const id of replaced) await expectOnce(id, 'replaced', 2)
    },
    150_000,
  )
})
