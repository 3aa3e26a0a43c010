// @ts-check
/** npm passes Ctrl-C on although the terminal has sent it already: within this time it is one and the same. */
const SAME_PRESS_MS = 500

/** The person at the terminal, or the system, asked to stop. */
export class Interrupted extends Error {
  /** @param {string} signal */
  constructor(signal) {
    super(`Stopped by ${signal}.`)
    this.name = 'Interrupted'
  }
}

/**
 * Turns signals into one promise that rejects at the first, and a call at the second.
 * @param {object} options
 * @param {(signal: string) => void} options.onFirst
 * @param {() => void} options.onSecond
 * @param {() => number} [options.now] milliseconds
 * @returns {{ interrupted: Promise<never>, isInterrupted: () => boolean, receive: (signal: string) => void }}
 */
export function interruption({ onFirst, onSecond, now = Date.now }) {
  /** @type {(error: Error) => void} */
  let reject = () => {}
  /** @type {Promise<never>} */
  const interrupted = new Promise((_resolve, fail) => {
    reject = fail
  })
  interrupted.catch(() => {})
  /** @type {number | null} */
  let first = null
  const receive = (/** @type {string} */ signal) => {
    if (first === null) {
      first = now()
      onFirst(signal)
      reject(new Interrupted(signal))
    } else if (now() - first >= SAME_PRESS_MS) {
      onSecond()
    }
  }
  return { interrupted, isInterrupted: () => first !== null, receive }
}

/**
 * Listens for what asks a program to stop: the signals, and the end of npm, which does not pass every signal on.
 * @param {(signal: string) => void} receive
 * @param {NodeJS.ProcessEnv} env
 */
export function listenForSignals(receive, env) {
  for (const signal of /** @type {const} */ (['SIGINT', 'SIGTERM', 'SIGHUP'])) process.on(signal, () => receive(signal))
  if (!env.npm_lifecycle_event) return
  const parent = process.ppid
  const timer = setInterval(() => {
    if (process.ppid === parent) return
    clearInterval(timer)
    receive('the end of npm')
  }, 500)
  timer.unref()
}
