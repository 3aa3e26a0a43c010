// @ts-check
import { join } from 'node:path'
import { choosePostgres, findPostgres } from './postgres-programs.mjs'
import { lastLines, run } from './run.mjs'
import { SetupProblem } from './problem.mjs'

/**
 * Makes an empty database on a test cluster.
 * @param {string} clusterUrl signs in as a user that may make databases
 * @param {string} name
 * @returns {Promise<string>} its address
 */
export async function createTestDatabase(clusterUrl, name) {
  const { bin } = choosePostgres(findPostgres(), null, clusterUrl)
  const url = new URL(clusterUrl)
  const args = ['-h', url.hostname, '-p', url.port, '-U', url.username, '--maintenance-db=postgres', name]
  const env = { PATH: '/usr/bin:/bin', PGPASSWORD: decodeURIComponent(url.password) }
  const done = await run(join(bin, 'createdb'), args, { env, timeoutMs: 60_000 })
  if (done.code !== 0)
    throw new SetupProblem(`PostgreSQL could not make a test database:\n${lastLines(done.output, 5)}`)
  url.pathname = `/${name}`
  return url.href
}
