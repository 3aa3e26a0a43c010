import { setTimeout as wait } from 'node:timers/promises'
import { drizzle, type NodePgDatabase } from 'drizzle-orm/node-postgres'
import type { PoolClient } from 'pg'
import { systemClock } from '#server/adapters/clock/clock.ts'
import type { Services } from '#server/services.ts'
import { refusalOf, type Schema } from '#server/store/database.ts'
import * as schema from '#server/store/schema/all.ts'
import { CommandError } from './command-error.ts'

export interface Transaction {
  readonly db: NodePgDatabase<Schema>
  /** The connection itself: for COPY, and for the queue. */
  readonly client: PoolClient
}

const RETRIED = new Set(['40001', '40P01'])

/**
 * Runs a command's writes: all or none. A rule of the database (SQLSTATE EP001) becomes a CommandError with its sentence;
 * deadlocks are tried again. `work` must be able to run twice.
 */
export async function inTransaction<T>(
  services: Pick<Services, 'pool' | 'clock'>,
  work: (tx: Transaction) => Promise<T>,
): Promise<T> {
  for (let attempt = 1; ; attempt += 1) {
    try {
      return await once(services, work)
    } catch (error) {
      const refusal = refusalOf(error)
      if (refusal?.code === 'EP001') throw new CommandError('refused', refusal.message)
      if (refusal === null || !RETRIED.has(refusal.code) || attempt === 4) throw error
      await wait(20 * 2 ** attempt)
    }
  }
}

async function once<T>(services: Pick<Services, 'pool' | 'clock'>, work: (tx: Transaction) => Promise<T>): Promise<T> {
  const client = await services.pool.connect()
  let broken: Error | undefined
  try {
    await client.query('begin')
    if (services.clock !== systemClock) {
      await client.query(`select set_config('evenpenny.demo_now', $1, true)`, [services.clock.now().toISOString()])
    }
    const value = await work({ client, db: drizzle(client, { schema, casing: 'snake_case' }) })
    await client.query('commit')
    return value
  } catch (error) {
    await client.query('rollback').catch((failure: Error) => {
      broken = failure
    })
    throw error
  } finally {
    client.release(broken)
  }
}
