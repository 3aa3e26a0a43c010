// @ts-check
import { existsSync, readdirSync } from 'node:fs'
import { join } from 'node:path'
import { SetupProblem } from './problem.mjs'

/** Where Debian puts each major version of PostgreSQL's server programs. */
const DEBIAN_ROOT = '/usr/lib/postgresql'
/** The oldest major version that the product is tested on. */
export const LEAST_POSTGRES = 15
const NEEDED = ['initdb', 'pg_ctl', 'postgres', 'psql', 'createdb']

/**
 * @typedef {object} PostgresPrograms
 * @property {number} major
 * @property {string} bin folder with initdb, pg_ctl, postgres, psql and createdb
 */

/**
 * The usable versions on this machine, newest first.
 * @param {string} [root] folder with one folder a major version
 * @returns {PostgresPrograms[]}
 */
export function findPostgres(root = DEBIAN_ROOT) {
  if (!existsSync(root)) return []
  return readdirSync(root)
    .map((name) => ({ major: Number(name), bin: join(root, name, 'bin') }))
    .filter(({ major, bin }) => major >= LEAST_POSTGRES && NEEDED.every((program) => existsSync(join(bin, program))))
    .sort((a, b) => b.major - a.major)
}

/**
 * Chooses the programs for a cluster: the version that made it, since another cannot open it; the newest for a new one.
 * @param {readonly PostgresPrograms[]} found newest first
 * @param {number | null} clusterMajor the version that made the cluster, null for one still to be made
 * @param {string} clusterFolder for the message
 * @returns {PostgresPrograms}
 */
export function choosePostgres(found, clusterMajor, clusterFolder) {
  const match = clusterMajor === null ? found[0] : found.find(({ major }) => major === clusterMajor)
  if (match) return match
  if (clusterMajor === null) {
    throw new SetupProblem(
      `PostgreSQL's server programs (version ${LEAST_POSTGRES} or newer) are not under ${DEBIAN_ROOT}. ` +
        'Install the Debian package postgresql and run the command again.',
    )
  }
  throw new SetupProblem(
    `The database in ${clusterFolder} was made by PostgreSQL ${clusterMajor}, which is not installed ` +
      `(found: ${found.map(({ major }) => major).join(', ') || 'none'}). Install the Debian package ` +
      `postgresql-${clusterMajor}, or dump it where that version runs and load it here.`,
  )
}
