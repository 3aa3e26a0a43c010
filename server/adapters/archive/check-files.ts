import { execFile } from 'node:child_process'
import { readFile } from 'node:fs/promises'
import { fileURLToPath } from 'node:url'
import { promisify } from 'node:util'

const SOURCE = new URL('../../check/check.mjs', import.meta.url)
const BUNDLER = new URL('../../check/bundle.mjs', import.meta.url)
const BUILT = new URL('../../../build/check/', import.meta.url)

/** The check that goes into every proof archive, as its bytes. */
export interface CheckFiles {
  readonly 'check.mjs': Uint8Array
  readonly 'bls12-381.mjs': Uint8Array
}

/** Reads the built check. Builds it first where it is not there, or where it is older than its source. */
export async function readCheckFiles(): Promise<CheckFiles> {
  const built = await readBuilt()
  if (built !== null) return built
  await promisify(execFile)(process.execPath, [fileURLToPath(BUNDLER)])
  const now = await readBuilt()
  if (now === null) throw new Error('The check could not be built: run "npm run build" and see what it says.')
  return now
}

async function readBuilt(): Promise<CheckFiles | null> {
  const read = async (url: URL) => new Uint8Array(await readFile(url))
  try {
    const [source, check, bls] = await Promise.all([
      read(SOURCE),
      read(new URL('check.mjs', BUILT)),
      read(new URL('bls12-381.mjs', BUILT)),
    ])
    return Buffer.compare(source, check) === 0 ? { 'check.mjs': check, 'bls12-381.mjs': bls } : null
  } catch (error) {
    if (error instanceof Error && 'code' in error && error.code === 'ENOENT') return null
    throw error
  }
}
