// @ts-check
import { generateKeyPairSync, randomBytes } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, renameSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { SetupProblem } from './problem.mjs'

/**
 * The key files of a local data folder, each with what makes one. server/config reads the first three; the passwords
 * are PostgreSQL's.
 * @type {Readonly<Record<string, () => string>>}
 */
export const KEY_FILES = {
  'session-secret': () => randomBytes(32).toString('base64url'),
  'encryption-keys': () => `k1:${randomBytes(32).toString('base64')}`,
  'signing-key.pem': () =>
    generateKeyPairSync('ed25519').privateKey.export({ type: 'pkcs8', format: 'pem' }).toString().trim(),
  'database-password': () => randomBytes(24).toString('base64url'),
  'database-superuser-password': () => randomBytes(24).toString('base64url'),
}

/** @param {string} dataFolder */
export const keysFolder = (dataFolder) => join(dataFolder, 'keys')

/**
 * Makes the key files that are missing, readable by this user alone.
 * @param {string} dataFolder
 * @param {string | null} database folder of the data folder's database where there is one already; then none may be
 *   missing, since new keys would not open what the old ones closed
 */
export function ensureKeys(dataFolder, database) {
  const folder = keysFolder(dataFolder)
  mkdirSync(folder, { recursive: true, mode: 0o700 })
  const missing = Object.keys(KEY_FILES).filter((name) => !existsSync(join(folder, name)))
  if (missing.length > 0 && database !== null) {
    throw new SetupProblem(missingKeysProblem(dataFolder, database, missing))
  }
  for (const name of missing) {
    const content = /** @type {() => string} */ (KEY_FILES[name])()
    // The name appears only with the whole content behind it.
    const draft = join(folder, `${name}.new`)
    writeFileSync(draft, `${content}\n`, { mode: 0o600, flush: true })
    renameSync(draft, join(folder, name))
  }
}

/** @param {string} dataFolder @param {string} database @param {readonly string[]} missing */
export function missingKeysProblem(dataFolder, database, missing) {
  const folders = database.startsWith(`${dataFolder}/`) ? [dataFolder] : [dataFolder, database]
  const moves = folders.map((folder) => `\n  mv ${folder} ${folder}-without-keys`).join('')
  return (
    `There is a database in ${database}, but ${missing.join(', ')} ${missing.length === 1 ? 'is' : 'are'} missing from ` +
    `${keysFolder(dataFolder)}. New keys would not open what the old ones closed. Put them back from a copy, ` +
    `or move everything away and start anew:${moves}`
  )
}

/** @param {string} dataFolder @param {string} name */
export function readKey(dataFolder, name) {
  return readFileSync(join(keysFolder(dataFolder), name), 'utf8').trim()
}
