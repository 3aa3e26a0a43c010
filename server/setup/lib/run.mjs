// @ts-check
import { spawn } from 'node:child_process'

/**
 * @typedef {object} RunResult
 * @property {number | null} code exit code, null when a signal ended it
 * @property {NodeJS.Signals | null} signal
 * @property {string} output standard output and standard error as they came, kept to their last 4 MiB
 * @property {boolean} timedOut
 */

const KEPT = 4 * 1024 * 1024
const GRACE_MS = 20_000

/** Process groups of the programs that run now. */
const running = new Set()
let closed = false

/**
 * Ends every program that run() has started and that still runs. From then on only those are started that serve the
 * stopping itself.
 * @param {NodeJS.Signals} signal
 */
export function endRunning(signal) {
  closed = true
  for (const pid of running) endGroup(pid, signal)
}

/**
 * Runs a program to its end. Never throws for a program that fails or cannot be found: look at `code` (127 when it
 * could not be started).
 * @param {string} program
 * @param {readonly string[]} args
 * @param {object} [options]
 * @param {string} [options.cwd]
 * @param {NodeJS.ProcessEnv} [options.env]
 * @param {number} [options.uid]
 * @param {number} [options.gid]
 * @param {string} [options.input] given on standard input, which is otherwise empty
 * @param {boolean} [options.terminal] standard input is the terminal's own, so that sudo can ask for a password
 * @param {number} [options.timeoutMs] after it the program and all that it started are asked to end, and killed soon after
 * @param {boolean} [options.whileStopping] it is part of stopping, so it runs even after endRunning
 * @param {(text: string) => void} [options.onOutput]
 * @returns {Promise<RunResult>}
 */
export function run(program, args, options = {}) {
  if (closed && !options.whileStopping) {
    return Promise.resolve({
      code: 130,
      signal: null,
      output: `${program} was not started: stopping.\n`,
      timedOut: false,
    })
  }
  return new Promise((resolve) => {
    // A group of its own lets a time limit end what the program started as well; a password prompt needs the terminal's.
    const detached = options.terminal !== true
    const child = spawn(program, args, {
      cwd: options.cwd,
      env: options.env ?? process.env,
      uid: options.uid,
      gid: options.gid,
      detached,
      stdio: [options.terminal ? 'inherit' : options.input === undefined ? 'ignore' : 'pipe', 'pipe', 'pipe'],
    })
    const group = child.pid === undefined ? 0 : detached ? -child.pid : child.pid
    let output = ''
    let timedOut = false
    /** @type {NodeJS.Timeout | undefined} */
    let killTimer
    const take = (/** @type {string} */ text) => {
      output = (output + text).slice(-KEPT)
      options.onOutput?.(text)
    }
    for (const stream of [child.stdout, child.stderr]) {
      stream?.setEncoding('utf8')
      stream?.on('data', take)
    }
    const timer =
      options.timeoutMs === undefined
        ? undefined
        : setTimeout(() => {
            timedOut = true
            if (group === 0) return
            endGroup(group, 'SIGTERM')
            killTimer = setTimeout(() => endGroup(group, 'SIGKILL'), GRACE_MS)
          }, options.timeoutMs)
    let settled = false
    const settle = (/** @type {number | null} */ code, /** @type {NodeJS.Signals | null} */ signal) => {
      if (settled) return
      settled = true
      running.delete(group)
      clearTimeout(timer)
      clearTimeout(killTimer)
      resolve({ code, signal, output, timedOut })
    }
    child.on('error', (error) => {
      take(`${error.message}\n`)
      settle(127, null)
    })
    child.on('close', settle)
    if (child.stdin) {
      child.stdin.on('error', () => {})
      child.stdin.end(options.input)
    }
    if (group !== 0 && !options.whileStopping) running.add(group)
  })
}

/**
 * Sends a signal to a process, or to a group when the number is negative. One that has ended is no error, nor is one that
 * belongs to root by way of sudo: that one gets its signal from the terminal.
 * @param {number} pid
 * @param {NodeJS.Signals} signal
 */
export function endGroup(pid, signal) {
  try {
    process.kill(pid, signal)
  } catch (error) {
    const { code } = /** @type {NodeJS.ErrnoException} */ (error)
    if (code !== 'ESRCH' && code !== 'EPERM') throw error
  }
}

/**
 * The last lines of a text, for a message.
 * @param {string} text
 * @param {number} lines
 */
export function lastLines(text, lines) {
  return text.trimEnd().split('\n').slice(-lines).join('\n')
}
