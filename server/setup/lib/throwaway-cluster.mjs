// @ts-check
import { randomBytes } from 'node:crypto'
import { mkdirSync, mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { databaseUrl, initCluster, startCluster, stopCluster } from './cluster.mjs'
import { canReach, postgresUser } from './cluster-place.mjs'
import { choosePostgres, findPostgres } from './postgres-programs.mjs'
import { freePorts } from './ports.mjs'

const ROLE = 'evenpenny'

/**
 * Starts a cluster for tests: in a temporary folder, on a free port, without waiting for the disk.
 * @returns {Promise<{ url: string, urlOf: (database: string) => string, stop: () => Promise<void> }>} url signs in as a
 *   superuser; stop also deletes the folder, and may be called more than once
 */
export async function startThrowawayCluster() {
  const user = await postgresUser()
  // A TMPDIR of root's own may be closed to PostgreSQL's user.
  const base = (await canReach(tmpdir(), user)) ? tmpdir() : '/tmp'
  mkdirSync(base, { recursive: true })
  const place = mkdtempSync(join(base, 'evenpenny-test-'))
  const [port = 0] = await freePorts(1)
  const password = randomBytes(18).toString('base64url')
  const programs = choosePostgres(findPostgres(), null, place)
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
