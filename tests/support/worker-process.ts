import { type ChildProcess, spawn } from 'node:child_process'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import type { CrashPoint } from '#server/jobs/crash-points.ts'
import type { TestSite } from './site.ts'

const ROOT = fileURLToPath(new URL('../..', import.meta.url))

/** A worker of the product in a process of its own. */
export interface Worker {
  readonly process: ChildProcess
  readonly ready: Promise<void>
  /** Resolves with the signal that ended it. */
  readonly ended: Promise<NodeJS.Signals | null>
}

/** Starts a worker on a site; `crashAt` has it kill itself after that write. Its jobs expire after 3 seconds. */
export function startWorker(site: TestSite, crashAt: CrashPoint | null): Worker {
  const child = spawn(process.execPath, ['--import', 'tsx', 'server/worker.ts'], {
    cwd: ROOT,
    env: {
      PATH: process.env.PATH,
      ...site.environment,
      EVENPENNY_JOB_EXPIRY_SECONDS: '3',
      EVENPENNY_LOG_LEVEL: 'silent',
      ...(crashAt ? { EVENPENNY_CRASH_AT: crashAt } : {}),
    },
    stdio: ['ignore', 'pipe', 'inherit'],
  })
  const ended = new Promise<NodeJS.Signals | null>((resolve) => child.once('exit', (_code, signal) => resolve(signal)))
  const ready = new Promise<void>((resolve, reject) => {
    createInterface({ input: child.stdout }).on('line', (line) => line === 'worker ready' && resolve())
    ended.then(() => reject(new Error('The worker ended before it was ready.')))
  })
  ready.catch(() => undefined)
  return { process: child, ready, ended }
}

export async function stopWorker(worker: Worker): Promise<void> {
  worker.process.kill('SIGTERM')
  await worker.ended
}

/** Waits for a minute at most until something holds. */
export async function until(what: string, holds: () => Promise<boolean>): Promise<void> {
  const end = Date.now() + 60_000
  while (!(await holds())) {
    if (Date.now() > end) throw new Error(`This did not come about within a minute: ${what}.`)
    await new Promise((resolve) => setTimeout(resolve, 200))
  }
}

/**
 * Holds a worker back so that it is another one's turn, for some seconds at most: it may have been stopped in the middle of
 * a transaction, whose locks would then hold up everybody. The answer lets it go on at once.
 */
export function holdBack(worker: Worker, milliseconds = 8_000): () => void {
  worker.process.kill('SIGSTOP')
  const timer = setTimeout(() => worker.process.kill('SIGCONT'), milliseconds)
  return () => {
    clearTimeout(timer)
    worker.process.kill('SIGCONT')
  }
}
