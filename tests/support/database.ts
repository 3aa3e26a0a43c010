import { createHash, randomBytes } from 'node:crypto'
import { readdirSync, readFileSync } from 'node:fs'
import { fileURLToPath } from 'node:url'
import { Client } from 'pg'
import { openStore, type Store } from '#server/store/database.ts'
import { migrateDatabase } from '#server/store/migrate-database.ts'
import { QUEUES } from '#server/store/queues.ts'

const MIGRATIONS = fileURLToPath(new URL('../../drizzle', import.meta.url))
const TEMPLATE_LOCK = '5210742036479'

export interface TestDatabase extends Store {
  readonly url: string
  /** Closes the connections and deletes the database. */
  drop(): Promise<void>
}

/** A database of its own for one test file, cloned from a migrated template on the real PostgreSQL of the tests. */
export async function createTestDatabase(): Promise<TestDatabase> {
  const cluster = process.env.EVENPENNY_TEST_DATABASE_URL
  if (!cluster) throw new Error('EVENPENNY_TEST_DATABASE_URL must name a PostgreSQL cluster for tests: run npm test.')
  const name = `test_${randomBytes(6).toString('hex')}`
  const template = `template_${migrationsDigest()}`
  await withClient(cluster, async (client) => {
    await client.query('select pg_advisory_lock($1)', [TEMPLATE_LOCK])
    const { rowCount } = await client.query('select from pg_database where datname = $1', [template])
    if (rowCount === 0) {
      const draft = `${template}_${name}`
      await client.query(`create database ${draft}`)
      await migrateDatabase(withDatabase(cluster, draft))
      await client.query(`alter database ${draft} rename to ${template}`)
    }
    await client.query(`create database ${name} template ${template}`)
  })
  const url = withDatabase(cluster, name)
  const store = openStore(url)
  return {
    ...store,
    url,
    async drop() {
      await store.close()
      await withClient(cluster, (client) => client.query(`drop database if exists ${name} with (force)`))
    },
  }
}

async function withClient<T>(url: string, use: (client: Client) => Promise<T>): Promise<T> {
  const client = new Client({ connectionString: url })
  await client.connect()
  try {
    return await use(client)
  } finally {
    await client.end()
  }
}

function withDatabase(cluster: string, name: string): string {
  const url = new URL(cluster)
  url.pathname = `/${name}`
  return url.href
}

function migrationsDigest(): string {
  const hash = createHash('sha256').update(JSON.stringify(QUEUES))
  for (const name of readdirSync(MIGRATIONS).sort()) {
    if (name.endsWith('.sql')) hash.update(name).update(readFileSync(`${MIGRATIONS}/${name}`))
  }
  return hash.digest('hex').slice(0, 12)
}
