import { randomUUID } from 'node:crypto'
import PgBoss from 'pg-boss'
import { reasonOf } from '#server/adapters/health.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { QUEUES, type JobData, type QueueName } from '#server/store/queues.ts'
import type { AfterWrite } from './crash-points.ts'
import { type Handlers, jobHandlers } from './handlers.ts'
import { heartbeat, lookAround } from './look-around.ts'
import { sweep } from './sweep.ts'

export interface WorkerOptions {
  readonly databaseUrl: string
  readonly afterWrite: AfterWrite
  readonly onTrouble: (words: string) => void
}

export interface RunningWorker {
  /** Takes no new jobs, lets those in hand finish, and resolves. */
  stop(): Promise<void>
}

const SECOND = 1000
const HEARTBEAT = 10 * SECOND
const SWEEP = 5 * SECOND
const LOOK_AROUND = 60 * SECOND
const STOP_GRACE = 12 * SECOND
const DAY_SECONDS = 24 * 3600

/** Works off the queue until it is stopped. */
export async function runWorker(services: Services, options: WorkerOptions): Promise<RunningWorker> {
  const boss = new PgBoss({
    connectionString: options.databaseUrl,
    application_name: 'evenpenny queue',
    max: 4,
    schedule: false,
    migrate: false,
    maintenanceIntervalSeconds: 2,
    archiveCompletedAfterSeconds: DAY_SECONDS,
    // Jobs that were given up stay where an administrator can have them tried again.
    archiveFailedAfterSeconds: 400 * DAY_SECONDS,
    deleteAfterDays: 30,
  })
  boss.on('error', (error) => options.onTrouble(`The queue: ${reasonOf(error)}`))
  await boss.start()
  const handlers = jobHandlers(services, options.afterWrite)
  for (const queue of Object.keys(QUEUES) as QueueName[]) await work(boss, services, handlers, queue, options)
  const id = randomUUID()
  const startedAt = services.clock.now()
  const loops = [
    every(HEARTBEAT, 'The heartbeat', () => heartbeat(services, id, startedAt), options),
    every(SWEEP, 'The look for due work', () => sweep(services), options),
    every(LOOK_AROUND, 'The look at the services', () => lookAround(services), options),
  ]
  return {
    async stop() {
      await Promise.all(loops.map((loop) => loop.stop()))
      await boss.stop({ graceful: true, wait: true, timeout: STOP_GRACE })
    },
  }
}

async function work<Q extends QueueName>(
  boss: PgBoss,
  services: Services,
  handlers: Handlers,
  queue: Q,
  options: WorkerOptions,
): Promise<void> {
  const settings = { pollingIntervalSeconds: 1, batchSize: 1 }
  await boss.work<JobData[Q]>(queue, settings, async ([job]) => {
    if (!job) return
    try {
      const outcome = await handlers[queue](job.data)
      if (outcome.kind === 'again') await again(services, queue, job, outcome.at)
      else if (outcome.kind === 'given-up') {
        await services.pool.query('update pgboss.job set retry_limit = retry_count where id = $1', [job.id])
        throw new Error(outcome.reason)
      }
    } catch (error) {
      options.onTrouble(`A ${queue} job did not succeed: ${reasonOf(error)}`)
      throw error
    }
  })
}

/** Enqueues the same job for later, unless one like it waits already: as after a job that ran twice. */
async function again<Q extends QueueName>(
  services: Services,
  queue: Q,
  job: PgBoss.Job<JobData[Q]>,
  at: Date,
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const like = await tx.client.query(
      `select from pgboss.job where name = $1 and data = $2 and id <> $3 and state in ('created', 'retry') limit 1`,
      [queue, job.data, job.id],
    )
    if (like.rowCount === 0) await services.queue.enqueue(tx.client, queue, job.data, { startAfter: at })
  })
}

/** Runs something now and then again and again, one run at a time. */
function every(
  milliseconds: number,
  what: string,
  run: () => Promise<void>,
  options: WorkerOptions,
): { stop(): Promise<void> } {
  let stopped = false
  let timer: NodeJS.Timeout | undefined
  let running: Promise<void> = Promise.resolve()
  const go = () => {
    running = run()
      .catch((error: unknown) => options.onTrouble(`${what} did not succeed: ${reasonOf(error)}`))
      .then(() => {
        if (!stopped) timer = setTimeout(go, milliseconds)
      })
  }
  go()
  return {
    stop: async () => {
      stopped = true
      clearTimeout(timer)
      await running
    },
  }
}
