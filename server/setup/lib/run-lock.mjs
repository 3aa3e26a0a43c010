// @ts-check
import { existsSync, linkSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { commandOf, markOf, stillRuns } from './processes.mjs'
import { endGroup } from './run.mjs'
import { SetupProblem } from './problem.mjs'

/** @typedef {import('./processes.mjs').ProcessMark} ProcessMark */
/** @typedef {{ owner: ProcessMark, services: ProcessMark[] }} LockContent */

/**
 * Takes the lock of a data folder, so that only one start at a time works on it. A lock whose owner has died is taken
 * over, and services that outlived it are ended.
 * @param {string} dataFolder
 * @param {(line: string) => void} say
 * @returns {Promise<{ record: (pids: readonly number[]) => void, release: () => void }>}
 */
export async function takeRunLock(dataFolder, say) {
  const file = join(dataFolder, 'run.lock')
  const owner = markOf(process.pid)
  const draft = `${file}.${process.pid}`
  const write = (/** @type {string} */ path, /** @type {LockContent} */ content) =>
    writeFileSync(path, `${JSON.stringify(content)}\n`, { mode: 0o600 })
  write(draft, { owner, services: [] })
  try {
    for (let tries = 0; ; tries += 1) {
      try {
        // A link fails if the name is there, and shows the content all at once.
        linkSync(draft, file)
        break
      } catch (error) {
        if (/** @type {NodeJS.ErrnoException} */ (error).code !== 'EEXIST' || tries === 3) throw error
        const left = readLock(file)
        if (left && stillRuns(left.owner)) throw new SetupProblem(heldProblem(dataFolder, left.owner.pid))
        if (left) await endServices(left.services, say)
        rmSync(file, { force: true })
      }
    }
  } finally {
    rmSync(draft, { force: true })
  }
  return {
    record(pids) {
      write(draft, { owner, services: pids.map(markOf) })
      renameSync(draft, file)
    },
    release() {
      if (existsSync(file) && readLock(file)?.owner.pid === process.pid) rmSync(file)
    },
  }
}

/** @param {string} dataFolder @param {number} pid */
export function heldProblem(dataFolder, pid) {
  return (
    `Evenpenny already runs on ${dataFolder}: process ${pid} started it. Use that one, or stop it first ` +
    `(Ctrl-C in its terminal, or kill ${pid}). For a second one, set EVENPENNY_DATA to another folder and choose other ports.`
  )
}

/** @param {string} file @returns {LockContent | null} */
function readLock(file) {
  try {
    return JSON.parse(readFileSync(file, 'utf8'))
  } catch {
    return null
  }
}

/** @param {readonly ProcessMark[]} services @param {(line: string) => void} say */
async function endServices(services, say) {
  const alive = services.filter(stillRuns)
  if (alive.length === 0) return
  say(`An earlier start was killed and left ${alive.length} of its services running. Stopping them first.`)
  for (const { pid } of alive) endGroup(pid, 'SIGTERM')
  const until = Date.now() + 10_000
  while (alive.some(stillRuns) && Date.now() < until) await new Promise((resolve) => setTimeout(resolve, 100))
  for (const mark of alive.filter(stillRuns)) {
    say(`Process ${mark.pid} (${commandOf(mark.pid).slice(0, 60)}) did not stop and is killed.`)
    endGroup(mark.pid, 'SIGKILL')
  }
}
