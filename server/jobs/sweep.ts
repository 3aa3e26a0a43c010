import { and, eq, isNull, lt, lte, sql } from 'drizzle-orm'
import { checkpointIsDue } from '#server/commands/put-checkpoint.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { cosigningIsDue } from './cosign-checkpoints.ts'
import { hasLiveJob } from '#server/store/queries/jobs.ts'
import { drawsWithWaitingSeal } from '#server/store/queries/sealings.ts'
import type { QueueName } from '#server/store/queues.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrantImport } from '#server/store/schema/entrant.ts'
import { mail } from '#server/store/schema/operation.ts'
import { logCheckpoint } from '#server/store/schema/record.ts'
import { archive, result } from '#server/store/schema/result.ts'
import { seal } from '#server/store/schema/seal.ts'

/** What is due is left to its own job for so long, in milliseconds. */
const GRACE = 10_000

/**
 * Looks for due work that has no job, as after a restored backup or a queue that lost something, and enqueues it. The jobs
 * themselves decide whether there is anything to do.
 */
export async function sweep(services: Services): Promise<void> {
  const due = new Date(services.clock.now().getTime() - GRACE)
  const { db } = services
  const closing = await db
    .select({ id: draw.id })
    .from(draw)
    .where(and(eq(draw.state, 'open'), lte(draw.closesAt, due)))
  for (const { id } of closing) await ensure(services, 'close', id)
  for (const id of await drawsWithWaitingSeal(db, due)) await ensure(services, 'timestamp', id)
  const settling = await db
    .selectDistinct({ id: draw.id })
    .from(draw)
    .innerJoin(seal, eq(seal.drawId, draw.id))
    .where(
      and(
        eq(draw.state, 'sealed'),
        lte(seal.beaconRoundAt, due),
        sql`not exists (select from seal r where r.supersedes = ${seal.digest})`,
      ),
    )
  for (const { id } of settling) await ensure(services, 'settle', id)
  const unstored = await db
    .select({ id: result.drawId })
    .from(result)
    .leftJoin(archive, eq(archive.drawId, result.drawId))
    .where(and(isNull(archive.drawId), lte(result.drawnAt, due)))
  for (const { id } of unstored) await ensure(services, 'archive', id)
  await ensureCheckpoint(services)
  if (await cosigningIsDue(services)) await ensureOne(services, 'cosign')
  await ensureSending(services, due)
  // An upload that nobody has touched for ten minutes has lost its process.
  await db
    .update(entrantImport)
    .set({ state: 'failed', failure: 'The upload broke off. Nothing was stored; upload the file again.' })
    .where(
      and(
        eq(entrantImport.state, 'reading'),
        lt(entrantImport.touchedAt, sql`clock_timestamp() - interval '10 minutes'`),
      ),
    )
}

/** The schedule of checkpoints: one after each batch of entries. */
async function ensureCheckpoint(services: Services): Promise<void> {
  const [unstored] = await services.db
    .select({ size: logCheckpoint.size })
    .from(logCheckpoint)
    .where(isNull(logCheckpoint.storedAt))
    .limit(1)
  if (unstored || (await checkpointIsDue(services.db))) await ensureOne(services, 'checkpoint')
}

async function ensure(
  services: Services,
  queue: Extract<QueueName, 'close' | 'timestamp' | 'settle' | 'archive'>,
  id: string,
): Promise<void> {
  await inTransaction(services, async (tx) => {
    // Two workers that sweep at once enqueue one job.
    await tx.db.select({ id: draw.id }).from(draw).where(eq(draw.id, id)).for('update')
    if (await hasLiveJob(tx.db, queue, id)) return
    await services.queue.enqueue(tx.client, queue, { draw: id })
  })
}

async function ensureSending(services: Services, due: Date): Promise<void> {
  const [waiting] = await services.db
    .select({ id: mail.id })
    .from(mail)
    .where(and(eq(mail.state, 'queued'), lte(mail.nextAttemptAt, due)))
    .limit(1)
  if (waiting) await ensureOne(services, 'send-mail')
}

/** Enqueues a job of a kind that is for the whole site, unless one waits or runs. */
async function ensureOne(services: Services, queue: 'send-mail' | 'checkpoint' | 'cosign'): Promise<void> {
  await inTransaction(services, async (tx) => {
    await tx.db.execute(sql`select pg_advisory_xact_lock(hashtext(${`sweep ${queue}`}))`)
    const { rows } = await tx.db.execute(sql`
      select from pgboss.job where name = ${queue} and state in ('created', 'retry', 'active') limit 1`)
    if (rows.length === 0) await services.queue.enqueue(tx.client, queue, {})
  })
}
