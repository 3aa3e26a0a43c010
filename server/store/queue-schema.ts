import PgBoss from 'pg-boss'
import { QUEUES } from './queues.ts'

/** Makes the queue's tables and one queue for each kind of job, with its rules for trying again. */
export async function installQueue(url: string): Promise<void> {
  const boss = new PgBoss({ connectionString: url, max: 2, supervise: false, schedule: false })
  boss.on('error', () => undefined)
  await boss.start()
  try {
    const present = new Set((await boss.getQueues()).map(({ name }) => name))
    for (const [name, options] of Object.entries(QUEUES)) {
      const queue = { name, policy: 'standard' as const, ...options }
      if (present.has(name)) await boss.updateQueue(name, queue)
      else await boss.createQueue(name, queue)
    }
  } finally {
    await boss.stop({ graceful: false, wait: true })
  }
}
