import { fileURLToPath } from 'node:url'
import { drizzle } from 'drizzle-orm/node-postgres'
import { migrate } from 'drizzle-orm/node-postgres/migrator'
import { Client } from 'pg'
import { installQueue } from './queue-schema.ts'

const MIGRATIONS = fileURLToPath(new URL('../../drizzle', import.meta.url))
// Drizzle's migrator is unsafe when two run at once.
const LOCK = '5210742036470'

/** Brings a database up to the newest tables, and makes the queue's. Whoever comes second waits, and finds it done. */
export async function migrateDatabase(url: string): Promise<void> {
  const client = new Client({ connectionString: url, application_name: 'evenpenny migrate' })
  await client.connect()
  try {
    await client.query('select pg_advisory_lock($1)', [LOCK])
    await migrate(drizzle(client), { migrationsFolder: MIGRATIONS })
    await installQueue(url)
  } finally {
    await client.end()
  }
}
