// @ts-check
import { randomBytes } from 'node:crypto'
import { mkdtempSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { databaseUrl, initCluster, startCluster, stopCluster } from './cluster.mjs'
import { canReach, postgresUser } from './cluster-place.mjs'
import { choosePostgres, findPostgres } from './postgres-programs.mjs'
import { freePorts } from './ports.mjs'
import { markOf, stillRuns } from './processes.mjs'

const ROLE = 'evenpenny'
const OWNER = 'owner.json'
const PREFIX = 'evenpenny-test-'

/**
 * Starts a cluster for tests: in a temporary folder, on a free port, without waiting for the disk.
 * @returns {Promise<{ url: string, urlOf: (database: string) => string, stop: () => Promise<void> }>} url signs in as a
 *   superuser; stop also deletes the folder, and may be called more than once
 */
export async function startThrowawayCluster() {
  const user = await postgresUser()
  // A TMPDIR of root's own may be closed to PostgreSQL's user.
  const base = (await canReach(tmpdir(), user)) ? tmpdir() : '/tmp'
  const programs = choosePostgres(findPostgres(), null, base)
  await clearForgotten(base, programs, user)
  const place = mkdtempSync(join(base, PREFIX))
  writeFileSync(join(place, OWNER), JSON.stringify(markOf(process.pid)))
  const [port = 0] = await freePorts(1)
  const password = randomBytes(18).toString('base64url')
  const cluster = { place, programs, user, port, superuser: ROLE, password }
  const urlOf = (/** @type {string} */ database) => databaseUrl(cluster, { role: ROLE, password, database })
  const stop = async () => {
    await stopCluster(cluster, 'immediate')
    rmSync(place, { recursive: true, force: true })
  }
  try {
    await initCluster(cluster)
    const fast = ['fsync=off', 'synchronous_commit=off', 'full_page_writes=off', 'max_connections=200']
    await startCluster(cluster, fast)
  } catch (error) {
    await stop()
    throw error
  }
  return { url: urlOf('postgres'), urlOf, stop }
}

/**
 * Stops and deletes the throw-away clusters of this user's test runs that were killed.
 * @param {string} base
 * @param {import('./postgres-programs.mjs').PostgresPrograms} programs
 * @param {import('./cluster-place.mjs').ServiceUser} user
 */
async function clearForgotten(base, programs, user) {
  const self = user?.uid ?? process.getuid?.()
  for (const name of readdirSync(base).filter((each) => each.startsWith(PREFIX))) {
    const place = join(base, name)
    try {
      if (statSync(place).uid !== self || stillRuns(JSON.parse(readFileSync(join(place, OWNER), 'utf8')))) continue
    } catch {
      // Not one of ours, or one that is being made or deleted right now.
      continue
    }
    await stopCluster({ place, programs, user, port: 0, superuser: ROLE, password: '' }, 'immediate')
    rmSync(place, { recursive: true, force: true })
  }
}
