// @ts-check
import { createHash } from 'node:crypto'
import { existsSync, lstatSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'

/**
 * @typedef {object} PackagesState
 * @property {string} wanted digest of the lock file
 * @property {string | null} stamped digest of the lock file that was installed from, null when not recorded
 * @property {number} lockTime when the lock file was last written, milliseconds
 * @property {number | null} installedTime when npm last finished an installation, null when it never did
 * @property {number | null} stampTime when the stamp was written
 */

/**
 * Whether node_modules must be installed anew. npm writes its own list of what it installed last of all, so its time
 * tells a finished installation by hand from one that was cut off.
 * @param {PackagesState} state
 */
export function packagesOutdated(state) {
  if (state.installedTime === null) return true
  if (state.stamped === state.wanted) return false
  const byHandSinceStamp = state.stampTime === null || state.installedTime > state.stampTime
  return !(byHandSinceStamp && state.installedTime >= state.lockTime)
}

/** @param {string} root @returns {PackagesState} */
export function packagesState(root) {
  const lock = join(root, 'package-lock.json')
  const stamp = packagesStamp(root)
  return {
    wanted: digestOf(root, ['package-lock.json']),
    stamped: existsSync(stamp) ? readFileSync(stamp, 'utf8').trim() : null,
    lockTime: statSync(lock).mtimeMs,
    installedTime: timeOf(join(root, 'node_modules', '.package-lock.json')),
    stampTime: timeOf(stamp),
  }
}

/** @param {string} root */
export function stampPackages(root) {
  writeFileSync(packagesStamp(root), `${digestOf(root, ['package-lock.json'])}\n`)
}

/** @param {string} root */
const packagesStamp = (root) => join(root, 'node_modules', '.evenpenny-stamp')

/** What a build is made from; a change in any of them makes a new one due. */
const BUILD_SOURCES = [
  'src',
  'shared',
  'public',
  'server/check',
  'package.json',
  'package-lock.json',
  'tailwind.config.ts',
  'vite.config.ts',
  'tsconfig.json',
]
const BUILD_RESULTS = ['build/client', 'build/ssr', 'build/check-page']

/**
 * Whether the site must be built anew: by the content of its sources, as times tell nothing after a checkout.
 * @param {string} root
 */
export function buildOutdated(root) {
  const stamp = join(root, 'build', '.evenpenny-stamp')
  if (!existsSync(stamp) || BUILD_RESULTS.some((folder) => !existsSync(join(root, folder)))) return true
  return readFileSync(stamp, 'utf8').trim() !== buildDigest(root)
}

/**
 * Digest of everything that a build is made from. Take it before the build, so that a file changed while it ran makes
 * the next one due.
 * @param {string} root
 */
export function buildDigest(root) {
  return digestOf(root, BUILD_SOURCES)
}

/** @param {string} root @param {string} digest */
export function stampBuild(root, digest) {
  writeFileSync(join(root, 'build', '.evenpenny-stamp'), `${digest}\n`)
}

/**
 * @param {string} root
 * @param {readonly string[]} names files or folders under the root; one that is missing counts as such
 */
function digestOf(root, names) {
  const hash = createHash('sha256')
  const add = (/** @type {string} */ name) => {
    const path = join(root, name)
    if (!existsSync(path)) {
      hash.update(`missing ${name}\0`)
    } else if (lstatSync(path).isDirectory()) {
      for (const inner of readdirSync(path).sort()) add(`${name}/${inner}`)
    } else {
      const content = readFileSync(path)
      hash.update(`file ${name} ${content.length}\0`).update(content)
    }
  }
  for (const name of names) add(name)
  return hash.digest('hex')
}

/** @param {string} path */
function timeOf(path) {
  return existsSync(path) ? statSync(path).mtimeMs : null
}
