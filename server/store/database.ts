import { drizzle, type NodePgDatabase } from 'drizzle-orm/node-postgres'
import { DatabaseError, Pool } from 'pg'
import * as schema from './schema/all.ts'

export type Schema = typeof schema
/** The database, or one transaction of it: queries and commands take either. */
export type Database = Pick<
  NodePgDatabase<Schema>,
  'select' | 'selectDistinct' | 'insert' | 'update' | 'delete' | 'execute' | 'query' | '$with' | 'with' | '$count'
>
export type RootDatabase = NodePgDatabase<Schema>

export interface Store {
  readonly pool: Pool
  readonly db: RootDatabase
  close(): Promise<void>
}

/** Connects to PostgreSQL. Timeouts keep a dead connection or a forgotten transaction from holding locks for ever. */
export function openStore(url: string, options: { readonly connections?: number; readonly name?: string } = {}): Store {
  const pool = new Pool({
    connectionString: url,
    max: options.connections ?? 12,
    application_name: options.name ?? 'evenpenny',
    connectionTimeoutMillis: 10_000,
    idleTimeoutMillis: 30_000,
    keepAlive: true,
  })
  // A connection that breaks while idle is replaced by the pool; without a listener it would end the process.
  pool.on('error', () => undefined)
  return { pool, db: drizzle(pool, { schema, casing: 'snake_case' }), close: () => pool.end() }
}

export interface DatabaseRefusal {
  /** SQLSTATE. `EP001`: a rule of ours (drizzle/0002_rules.sql), whose message is a sentence. */
  readonly code: string
  readonly message: string
  readonly constraint: string | null
}

/** What PostgreSQL refused, out of the error that Drizzle wraps; null for any other error. */
export function refusalOf(error: unknown): DatabaseRefusal | null {
  for (let cause: unknown = error; cause instanceof Error; cause = cause.cause) {
    if (cause instanceof DatabaseError && cause.code) {
      return { code: cause.code, message: cause.message, constraint: cause.constraint ?? null }
    }
  }
  return null
}
