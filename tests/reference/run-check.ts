// Runs the check that ships in every archive, as a program of its own.
import { execFile, execFileSync } from 'node:child_process'
import { existsSync, mkdtempSync, readFileSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'

const built = join(import.meta.dirname, '../../build/check')
const source = join(import.meta.dirname, '../../server/check')

export interface Outcome {
  ok: boolean
  step: number | null
  where: string | null
  message: string
  steps: { step: number; title: string; found: string }[]
}

/** The folder with check.mjs and its library, built where it is missing or older than its source. */
export function builtCheck(): string {
  const text = (folder: string): string => {
    const file = join(folder, 'check.mjs')
    return existsSync(file) ? readFileSync(file, 'utf8') : ''
  }
  if (text(built) !== text(source) || !existsSync(join(built, 'bls12-381.mjs'))) {
    execFileSync(process.execPath, [join(source, 'bundle.mjs')], { stdio: 'pipe' })
  }
  return built
}

/** Runs it with these arguments. */
export function runCheck(...args: string[]): Promise<{ status: number; stdout: string; stderr: string }> {
  const program = join(builtCheck(), 'check.mjs')
  return new Promise((resolve) => {
    execFile(process.execPath, [program, ...args], { maxBuffer: 2 ** 26 }, (error, stdout, stderr) => {
      resolve({ status: error ? Number(error.code) : 0, stdout, stderr })
    })
  })
}

/** A new folder for one test file. */
export const scratch = (): string => mkdtempSync(join(tmpdir(), 'evenpenny-reference-'))

/** Writes bytes to a file in a folder and returns its path. */
export function put(folder: string, name: string, bytes: Uint8Array): string {
  const file = join(folder, name)
  writeFileSync(file, bytes)
  return file
}

/** Judges a file with --json. */
export async function judge(...args: string[]): Promise<Outcome> {
  const { stdout, stderr } = await runCheck('--json', ...args)
  if (stdout === '') throw new Error(`The check printed nothing: ${stderr}`)
  return JSON.parse(stdout) as Outcome
}
