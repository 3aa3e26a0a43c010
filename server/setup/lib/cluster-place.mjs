// @ts-check
import { createHash } from 'node:crypto'
import { chownSync, existsSync, mkdirSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { run } from './run.mjs'
import { SetupProblem } from './problem.mjs'

/** @typedef {{ uid: number, gid: number } | null} ServiceUser who PostgreSQL runs as; null for the user at hand */

/**
 * PostgreSQL refuses to run as root: there it runs as the user that Debian's package makes for it.
 * @returns {Promise<ServiceUser>}
 */
export async function postgresUser() {
  if (process.getuid?.() !== 0) return null
  const uid = await run('id', ['-u', 'postgres'])
  const gid = await run('id', ['-g', 'postgres'])
  if (uid.code !== 0 || gid.code !== 0) {
    throw new SetupProblem(
      'PostgreSQL does not run as root, and there is no user "postgres" to run it as. Install the Debian package ' +
        'postgresql, which makes that user, or run this command as an ordinary user.',
    )
  }
  return { uid: Number(uid.output), gid: Number(gid.output) }
}

/**
 * Whether a user can get into a folder, through all those above it.
 * @param {string} folder an existing folder
 * @param {ServiceUser} user
 */
export async function canReach(folder, user) {
  if (user === null) return true
  return (await run('test', ['-x', folder], { cwd: '/', ...user })).code === 0
}

/**
 * The folder that holds the cluster of a data folder: inside it, or under /var/lib when PostgreSQL's user cannot get
 * there (a checkout in root's home). What was chosen once is written down and stays.
 * @param {string} dataFolder absolute, existing
 * @param {ServiceUser} user
 * @param {(line: string) => void} say
 * @returns {Promise<string>}
 */
export async function clusterPlace(dataFolder, user, say) {
  const inside = join(dataFolder, 'postgres')
  const note = join(dataFolder, 'postgres-elsewhere')
  if (existsSync(note)) return readFileSync(note, 'utf8').trim()
  if (existsSync(inside) || (await canReach(dataFolder, user))) return inside
  const outside = outsidePlace(dataFolder)
  say(
    `PostgreSQL's user cannot get into ${dataFolder} (a folder above it is closed to others), ` +
      `so the database goes into ${outside}.`,
  )
  writeFileSync(note, `${outside}\n`)
  return outside
}

/**
 * @param {string} dataFolder
 * @returns {string} a folder under /var/lib that belongs to this data folder alone
 */
export function outsidePlace(dataFolder) {
  return `/var/lib/evenpenny-${createHash('sha256').update(dataFolder).digest('hex').slice(0, 12)}`
}

/** @typedef {{ state: 'absent' } | { state: 'half-made', found: string[] } | { state: 'made', major: number }} PlaceState */

/**
 * What is in a cluster's folder. The marker is written last, so files without it were cut off while they were made.
 * @param {string} place
 * @returns {PlaceState}
 */
export function inspectPlace(place) {
  const cluster = clusterFolder(place)
  if (!existsSync(cluster)) return { state: 'absent' }
  if (existsSync(markerFile(place))) {
    return { state: 'made', major: Number.parseInt(readFileSync(join(cluster, 'PG_VERSION'), 'utf8'), 10) }
  }
  return { state: 'half-made', found: readdirSync(cluster).sort() }
}

/**
 * The sentences for a half-made cluster. Nothing is deleted for the reader: it may be a database put there by hand.
 * @param {string} place
 * @param {readonly string[]} found
 */
export function halfMadeProblem(place, found) {
  const some = found.slice(0, 5).join(', ') + (found.length > 5 ? ', …' : '')
  const what = found.length === 0 ? 'an empty folder' : `${found.length} entries (${some})`
  return (
    `The database folder ${clusterFolder(place)} was begun but never finished: it holds ${what} ` +
    'and not the mark that is written last. It was probably interrupted. Move it away and start again:\n' +
    `  mv ${place} ${place}-half-made\n` +
    'Delete that folder once you are sure that you need nothing in it.'
  )
}

/**
 * Makes the folder around the cluster, owned by the user that PostgreSQL runs as.
 * @param {string} place
 * @param {ServiceUser} user
 */
export function makePlace(place, user) {
  mkdirSync(dirname(place), { recursive: true })
  mkdirSync(place, { recursive: true, mode: 0o700 })
  if (user) chownSync(place, user.uid, user.gid)
}

/**
 * Refuses a cluster that belongs to somebody else than who would run it.
 * @param {string} place an existing cluster
 * @param {ServiceUser} user
 */
export function checkOwner(place, user) {
  const owner = statSync(clusterFolder(place)).uid
  const self = user?.uid ?? process.getuid?.()
  if (owner === self) return
  throw new SetupProblem(
    `The database in ${place} belongs to the user with number ${owner}, and PostgreSQL would run as number ${self}. ` +
      'Run the command as the user who first ran it (root, if that was root), or set EVENPENNY_DATA to another folder.',
  )
}

/** @param {string} place */
export const clusterFolder = (place) => join(place, 'cluster')
/** @param {string} place */
export const markerFile = (place) => join(place, 'made.json')
/** @param {string} place */
export const serverLog = (place) => join(place, 'postgres.log')
