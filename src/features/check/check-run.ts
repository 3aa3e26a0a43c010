import type { FromWorker, ToWorker } from './messages.ts'

/** The parts of a Worker that a run needs. */
export interface WorkerLike {
  postMessage(message: ToWorker): void
  terminate(): void
  onmessage: ((event: MessageEvent<FromWorker>) => void) | null
  onerror: ((event: ErrorEvent) => void) | null
}

export interface CheckRun {
  /** Asks about the archive; answered once it has held. */
  ask(message: Exclude<ToWorker, { readonly kind: 'start' }>): void
  /** Ends the worker at once, in the middle of whatever it does. */
  end(): void
}

/** A worker that owes something and says nothing for so long is taken for lost. A slow phone tells progress far sooner. */
export const LONGEST_SILENCE_MS = 60_000

/** What settles something that was asked; the rest is told in between. */
const ANSWERS: ReadonlySet<FromWorker['kind']> = new Set(['held', 'failed', 'stopped', 'receipt', 'picks', 'walk'])

const LOST =
  'The check did not move for a minute and was ended. Another page may keep this device busy: try again, or check the archive by the command.'

/** Starts a worker on an archive. `tell` hears everything it says; it is ended when it fails, stops, or falls silent. */
export function beginCheck(
  createWorker: () => WorkerLike,
  start: Extract<ToWorker, { readonly kind: 'start' }>,
  tell: (message: FromWorker) => void,
  silence = LONGEST_SILENCE_MS,
): CheckRun {
  const worker = createWorker()
  let owed = 1
  let over = false
  let held = false
  let timer: ReturnType<typeof setTimeout> | undefined
  const end = () => {
    over = true
    clearTimeout(timer)
    worker.terminate()
  }
  const stop = (reason: string) => {
    if (over) return
    end()
    tell({ kind: 'stopped', reason })
  }
  const watch = () => {
    clearTimeout(timer)
    if (owed > 0 && !over) timer = setTimeout(() => stop(LOST), silence)
  }
  worker.onmessage = ({ data }) => {
    if (over) return
    if (ANSWERS.has(data.kind)) owed--
    if (data.kind === 'held') held = true
    // A question that could not be answered leaves the archive open for others.
    if (data.kind === 'failed' || (data.kind === 'stopped' && !held)) end()
    watch()
    tell(data)
  }
  worker.onerror = (event) => {
    event.preventDefault()
    stop('This browser ended the check: it may have run out of memory. Close other pages, or check it by the command.')
  }
  watch()
  worker.postMessage(start)
  return {
    ask(message) {
      if (over) return
      owed++
      watch()
      worker.postMessage(message)
    },
    end,
  }
}
