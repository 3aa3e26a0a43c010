import { availableParallelism } from 'node:os'
import { Worker } from 'node:worker_threads'

/** Keeps and checks passwords. bcrypt reads 72 bytes of a password: longer ones are refused before they come here. */
export interface Passwords {
  /** A bcrypt hash (`$2b$…`), with its own salt and cost in it. */
  hash(password: string): Promise<string>
  /** Whether the password is the one. For an account that does not exist pass null: it takes as long, and is false. */
  verify(password: string, hash: string | null): Promise<boolean>
  close(): Promise<void>
}

type Task =
  | { readonly kind: 'hash'; readonly password: string; readonly cost: number }
  | { readonly kind: 'verify'; readonly password: string; readonly hash: string }

interface Waiting {
  readonly task: Task
  readonly resolve: (value: string | boolean) => void
  readonly reject: (error: Error) => void
}

/** Twelve doublings: about half a second of one core per try in 2026, off the request thread. */
export const DEFAULT_COST = 12
/** Beyond this many waiting tries the site answers "busy" rather than let the queue grow. */
const MAX_WAITING = 64

/** The password queue is full: try again in a few seconds. */
export class PasswordsBusyError extends Error {
  constructor() {
    super('Many people are signing in at this moment. Wait a few seconds and try again.')
    this.name = 'PasswordsBusyError'
  }
}

/**
 * bcrypt in a small pool of threads, started on first use. `cost` is the base-2 logarithm of the rounds (4 to 31); lower it
 * only in tests.
 */
export function createPasswords(options: { readonly cost?: number; readonly threads?: number } = {}): Passwords {
  const cost = options.cost ?? DEFAULT_COST
  const threads = options.threads ?? Math.max(1, Math.min(4, availableParallelism() - 1))
  const queue: Waiting[] = []
  const idle: Worker[] = []
  const all = new Set<Worker>()
  const busy = new Map<Worker, Waiting>()
  // A well-formed hash of nothing in particular: comparing with it costs what comparing with a real one does.
  const nobodys = `$2b$${String(cost).padStart(2, '0')}$${'.'.repeat(53)}`

  const start = () => {
    // No loader of the parent's is wanted in there: the file is plain JavaScript.
    const worker = new Worker(new URL('./bcrypt-worker.mjs', import.meta.url), { execArgv: [] })
    worker.unref()
    all.add(worker)
    worker.on('message', (message: { value?: string | boolean; error?: string }) => {
      const waiting = busy.get(worker)
      busy.delete(worker)
      worker.unref()
      idle.push(worker)
      if (message.value === undefined) waiting?.reject(new Error(message.error ?? 'bcrypt failed'))
      else waiting?.resolve(message.value)
      next()
    })
    worker.on('error', (error) => {
      busy.get(worker)?.reject(error)
      busy.delete(worker)
      all.delete(worker)
      next()
    })
    return worker
  }

  const next = () => {
    while (queue.length > 0) {
      const worker = idle.pop() ?? (all.size < threads ? start() : null)
      if (!worker) return
      const waiting = queue.shift()
      if (!waiting) return
      busy.set(worker, waiting)
      worker.ref()
      worker.postMessage(waiting.task)
    }
  }

  const run = (task: Task) =>
    new Promise<string | boolean>((resolve, reject) => {
      if (queue.length >= MAX_WAITING) return reject(new PasswordsBusyError())
      queue.push({ task, resolve, reject })
      next()
    })

  const hash = async (password: string) => String(await run({ kind: 'hash', password, cost }))

  return {
    hash,
    async verify(password, stored) {
      const matches = (await run({ kind: 'verify', password, hash: stored ?? nobodys })) === true
      return matches && stored !== null
    },
    async close() {
      await Promise.all([...all].map((worker) => worker.terminate()))
    },
  }
}
