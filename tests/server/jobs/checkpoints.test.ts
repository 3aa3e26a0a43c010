import { asc } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { putCheckpoint } from '#server/commands/put-checkpoint.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { storeArchive } from '#server/jobs/store-archive.ts'
import { checkpointKey, storeCheckpoints } from '#server/jobs/store-checkpoints.ts'
import { sweep } from '#server/jobs/sweep.ts'
import { logRoot } from '#server/store/queries/log-tree.ts'
import { logCheckpoint, logEvent } from '#server/store/schema/record.ts'
import { archive } from '#server/store/schema/result.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { openCheckpoint } from '#shared/log/checkpoint.ts'
import { collect } from '#tests/support/archive/collect.ts'
import { makeDraft, makeOffice, makeOpen, makeSealed, type Office } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite({ clock })
  office = await makeOffice(site.services, { demo: true })
})
afterAll(() => site.close())

const sizes = async () =>
  (await site.services.db.select().from(logCheckpoint).orderBy(asc(logCheckpoint.size))).map(({ size }) => size)
const events = async () =>
  (await site.services.db.select().from(logEvent).orderBy(asc(logEvent.index))).map(({ event }) => event)
async function stored(size: number): Promise<string | null> {
  const found = await site.services.store.get(checkpointKey(size))
  return found && new TextDecoder().decode(await collect(found.stream))
}
const liveJobs = async () =>
  (
    await site.services.pool.query(
      `select from pgboss.job where name = 'checkpoint' and state in ('created', 'retry', 'active')`,
    )
  ).rowCount

describe('checkpoints', () => {
  it('are not made of an empty log, nor of a draft', async () => {
    await makeDraft(site.services, office)
    expect(await storeCheckpoints(site.services)).toBe(0)
    await sweep(site.services)
    expect([await sizes(), await events(), await liveJobs()]).toEqual([[], [], 0])
  })

  it('are made once for a batch of entries, stored as they were signed, and told of in the log', async () => {
    await makeOpen(site.services, office)
    await makeOpen(site.services, office)
    await Promise.all([sweep(site.services), sweep(site.services)])
    expect(await liveJobs()).toBe(1)
    await Promise.all([storeCheckpoints(site.services), storeCheckpoints(site.services)])
    await storeCheckpoints(site.services)
    expect(await sizes()).toEqual([2])
    expect(await events()).toEqual(['opened', 'opened', 'checkpointed'])
    const note = await stored(2)
    const opened = openCheckpoint(sha256, utf8(note ?? ''), {
      publicKeys: [site.services.signing.current.publicKey],
      origin: new URL(site.services.site.origin).host + '/log',
    })
    if (!opened.ok) throw new Error(opened.error.message)
    expect(opened.value.checkpoint.size).toBe(2)
    expect(toHex(opened.value.checkpoint.root)).toBe(toHex(await logRoot(site.services.db, sha256, 2)))
    const [, , told] = await site.services.db.select().from(logEvent).orderBy(asc(logEvent.index))
    expect(told).toMatchObject({
      index: 2,
      organisationId: null,
      drawId: null,
      digest: toHex(sha256(utf8(note ?? ''))),
    })
  })

  it('do not answer themselves: the next one waits for something else to happen', async () => {
    for (let i = 0; i < 3; i += 1) expect(await putCheckpoint(site.services)).toBeNull()
    await makeOpen(site.services, office)
    expect(await putCheckpoint(site.services)).toBe(4)
    expect(await putCheckpoint(site.services)).toBeNull()
    expect(await events()).toEqual(['opened', 'opened', 'checkpointed', 'opened', 'checkpointed'])
  })

  it('that were signed and not stored are stored by the next run', async () => {
    expect(await stored(4)).toBeNull()
    expect(await storeCheckpoints(site.services)).toBe(1)
    expect(await stored(4)).toContain('\n4\n')
    expect(await storeCheckpoints(site.services)).toBe(0)
  })

  it('never overwrite another object of their name', async () => {
    await makeOpen(site.services, office)
    const size = (await putCheckpoint(site.services)) ?? 0
    const bytes = utf8('something else')
    await site.services.store.put(
      checkpointKey(size),
      { size: bytes.length, sha256: toHex(sha256(bytes)), open: () => [bytes] as never },
      'text/plain',
    )
    await expect(storeCheckpoints(site.services)).rejects.toThrow()
    expect(await stored(size)).toBe('something else')
  })
})

describe('the archive of a draw', () => {
  it('has the same members of the log in a second run, however far the log has come', async () => {
    const id = await makeSealed(site.services, office)
    clock.advance(3600_000 + 5000)
    expect(await settleDraw(site.services, goOn, { draw: id })).toMatchObject({ kind: 'drawn' })
    const dies = (point: string) => {
      if (point === 'archive-stored') throw new Error('killed')
    }
    await expect(storeArchive(site.services, dies, { draw: id })).rejects.toThrow('killed')
    await makeOpen(site.services, office)
    await putCheckpoint(site.services)
    expect(await storeArchive(site.services, goOn, { draw: id })).toBe('stored')
    const keys: string[] = []
    for await (const { key } of site.services.store.list('proofs/')) keys.push(key)
    const [row] = await site.services.db.select().from(archive)
    expect(keys).toEqual([row?.key])
    expect(Object.keys(row?.members ?? {})).toEqual(expect.arrayContaining(['checkpoint.txt', 'log-proof.json']))
  })
})
