import PgBoss from 'pg-boss'
import type { Pool, PoolClient } from 'pg'
import type { JobData, QueueName } from '#server/store/queues.ts'

export interface EnqueueOptions {
  /** Not to be started before this instant. */
  readonly startAfter?: Date
}

/** Puts jobs into the queue inside the transaction of what causes them: both happen, or neither. */
export interface Queue {
  enqueue<Q extends QueueName>(
    client: Pick<PoolClient, 'query'>,
    queue: Q,
    data: JobData[Q],
    options?: EnqueueOptions,
  ): Promise<void>
}

/** The real queue. `expirySeconds`: how long a job may run before another worker takes it over. */
export function createQueue(pool: Pool, options: { readonly expirySeconds: number }): Queue {
  const boss = new PgBoss({
    db: { executeSql: (text, values) => pool.query(text, values) },
    supervise: false,
    schedule: false,
    migrate: false,
  })
  return {
    async enqueue(client, queue, data, { startAfter } = {}) {
      const id = await boss.send(queue, data, {
        expireInSeconds: queue === 'seal' ? Math.max(options.expirySeconds, 1800) : options.expirySeconds,
        retentionDays: 400,
        ...(startAfter ? { startAfter } : {}),
        db: { executeSql: (text, values) => client.query(text, values) },
      })
      if (id === null) throw new Error(`The queue took no ${queue} job.`)
    },
  }
}
