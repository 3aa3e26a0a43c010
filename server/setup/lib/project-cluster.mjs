// @ts-check
import { checkOwner, clusterPlace, halfMadeProblem, inspectPlace, postgresUser } from './cluster-place.mjs'
import { clearLeftover, databaseUrl, ensureDatabase, initCluster, markMade, startCluster } from './cluster.mjs'
import { choosePostgres, findPostgres } from './postgres-programs.mjs'
import { portProblem } from './ports.mjs'
import { ensureKeys, readKey } from './keys.mjs'
import { SetupProblem } from './problem.mjs'

/** @typedef {import('./cluster.mjs').Cluster} Cluster */

/** The role that the product signs in as: no superuser, so that it cannot switch the database's own rules off. */
const APP = { role: 'evenpenny', database: 'evenpenny' }

/**
 * Finds the cluster of a data folder, or makes the keys and the cluster where there is none, and starts it.
 * @param {string} dataFolder
 * @param {import('./ports.mjs').Ports} ports
 * @param {(line: string) => void} say
 * @param {(cluster: Cluster) => void} onStarting called before it is started, so that it can be stopped
 * @returns {Promise<{ cluster: Cluster, url: string, isNew: boolean }>} url signs in as the product; isNew: it was made now
 */
export async function startProjectCluster(dataFolder, ports, say, onStarting) {
  const user = await postgresUser()
  const place = await clusterPlace(dataFolder, user, say)
  const state = inspectPlace(place)
  if (state.state === 'half-made') throw new SetupProblem(halfMadeProblem(place, state.found))
  ensureKeys(dataFolder, state.state === 'made' ? place : null)
  const programs = choosePostgres(findPostgres(), state.state === 'made' ? state.major : null, place)
  const cluster = {
    place,
    programs,
    user,
    port: ports.database,
    superuser: 'evenpenny_cluster',
    password: readKey(dataFolder, 'database-superuser-password'),
  }
  const app = { ...APP, password: readKey(dataFolder, 'database-password') }
  if (state.state === 'absent') {
    say(`Making a PostgreSQL ${programs.major} database in ${place}.`)
    await initCluster(cluster)
    markMade(place, programs)
  } else {
    checkOwner(place, user)
    await clearLeftover(cluster, say)
  }
  const taken = await portProblem(ports, (name) => name === 'database')
  if (taken) throw new SetupProblem(taken)
  onStarting(cluster)
  await startCluster(cluster)
  await ensureDatabase(cluster, app)
  return { cluster, url: databaseUrl(cluster, app), isNew: state.state === 'absent' }
}
