// @ts-check
import { spawn } from 'node:child_process'
import { createWriteStream, existsSync, renameSync, statSync } from 'node:fs'
import { connect } from 'node:net'
import { createInterface } from 'node:readline'
import { endGroup } from './run.mjs'
import { readLogLine } from './log-lines.mjs'
import { SetupProblem } from './problem.mjs'

const LOG_LIMIT = 10 * 1024 * 1024
const KEPT_LINES = 30

/**
 * @typedef {object} Service
 * @property {string} name
 * @property {number} pid 0 when it could not be started
 * @property {Promise<string>} ended how it ended, for a sentence: "with exit code 1"
 * @property {() => boolean} running
 * @property {() => string[]} tail its last log lines
 * @property {(wanted: string) => Promise<void>} sawLine resolves once a line holding this text has come
 * @property {(graceMs: number) => Promise<void>} stop asks it to stop, and kills it after the time of grace
 */

/**
 * Starts a Node.js program of the product as a process of its own. Everything that it prints goes to a log file; warnings
 * and errors also to `onTrouble`.
 * @param {object} options
 * @param {string} options.name
 * @param {readonly string[]} options.args Node.js's arguments
 * @param {string} options.cwd
 * @param {NodeJS.ProcessEnv} options.env
 * @param {string} options.logFile
 * @param {(line: string) => void} options.onTrouble
 * @param {boolean} [options.ownGroup] out of reach of the terminal's Ctrl-C, which would end all services at once and out of
 *   order; what kills the group of the caller then does not reach it either
 * @returns {Service}
 */
export function startService({ name, args, cwd, env, logFile, onTrouble, ownGroup = true }) {
  if (existsSync(logFile) && statSync(logFile).size > LOG_LIMIT) renameSync(logFile, `${logFile}.old`)
  const log = createWriteStream(logFile, { flags: 'a', mode: 0o600 })
  const child = spawn(process.execPath, [...args], { cwd, env, detached: ownGroup, stdio: ['ignore', 'pipe', 'pipe'] })
  let running = child.pid !== undefined
  /** @type {string[]} */
  const kept = []
  /** @type {Array<{ wanted: string, resolve: () => void }>} */
  const watchers = []
  /** @type {Set<string>} */
  const seen = new Set()
  for (const [stream, isError] of /** @type {const} */ ([
    [child.stdout, false],
    [child.stderr, true],
  ])) {
    createInterface({ input: stream }).on('line', (line) => {
      log.write(`${line}\n`)
      kept.push(line)
      if (kept.length > KEPT_LINES) kept.shift()
      if (line.includes('ready')) seen.add(line)
      for (const watcher of watchers) if (line.includes(watcher.wanted)) watcher.resolve()
      const trouble = readLogLine(line, isError)
      if (trouble !== null) onTrouble(trouble)
    })
  }
  /** @type {Promise<string>} */
  const ended = new Promise((resolve) => {
    const finish = (/** @type {string} */ how) => {
      running = false
      // Whoever waits for the end may read the log then.
      log.end(() => resolve(how))
    }
    child.once('error', (error) => finish(`before it began: ${error.message}`))
    child.once('close', (code, signal) => finish(signal ? `by ${signal}` : `with exit code ${code}`))
  })
  return {
    name,
    pid: child.pid ?? 0,
    ended,
    running: () => running,
    tail: () => [...kept],
    sawLine: (wanted) =>
      new Promise((resolve) => {
        if ([...seen].some((line) => line.includes(wanted))) resolve()
        else watchers.push({ wanted, resolve })
      }),
    async stop(graceMs) {
      if (!running || child.pid === undefined) return
      endGroup(child.pid, 'SIGTERM')
      const group = ownGroup ? -child.pid : child.pid
      const timer = setTimeout(() => endGroup(group, 'SIGKILL'), graceMs)
      await ended
      clearTimeout(timer)
    },
  }
}

/**
 * Waits until something holds, unless the service ends first or the time runs out.
 * @param {Service} service
 * @param {Promise<unknown>} ready
 * @param {number} timeoutMs
 */
export async function waitReady(service, ready, timeoutMs) {
  /** @type {NodeJS.Timeout | undefined} */
  let timer
  const late = new Promise((resolve) => {
    timer = setTimeout(() => resolve('late'), timeoutMs)
  })
  const first = await Promise.race([ready.then(() => 'ready'), service.ended, late])
  clearTimeout(timer)
  if (first === 'ready') return
  const what = first === 'late' ? `was not ready within ${timeoutMs / 1000} seconds` : `ended ${first}`
  throw new ServiceEnded(service, what)
}

/** A service that ended by itself or never became ready; the message carries its last log lines. */
export class ServiceEnded extends SetupProblem {
  /** @param {Service} service @param {string} what */
  constructor(service, what) {
    const lines = service.tail()
    super(
      `The ${service.name} ${what}. ${lines.length === 0 ? 'It printed nothing.' : `Its last lines:\n${lines.join('\n')}`}`,
    )
    this.name = 'ServiceEnded'
  }
}

/**
 * Resolves once a TCP port of loopback accepts a connection. Gives up when the signal is raised.
 * @param {number} port
 * @param {AbortSignal} signal
 */
export async function portOpens(port, signal) {
  while (!signal.aborted) {
    const open = await new Promise((resolve) => {
      const socket = connect({ port, host: '127.0.0.1' })
      socket.once('connect', () => resolve(true)).once('error', () => resolve(false))
      socket.once('connect', () => socket.destroy())
    })
    if (open) return
    await pause(100)
  }
}

/**
 * Resolves once an address answers 200. Gives up when the signal is raised.
 * @param {string} url
 * @param {AbortSignal} signal
 */
export async function answersOk(url, signal) {
  while (!signal.aborted) {
    try {
      const response = await fetch(url, { signal: AbortSignal.timeout(5000) })
      await response.arrayBuffer()
      if (response.status === 200) return
    } catch {
      // Not there yet.
    }
    await pause(100)
  }
}

/** @param {number} ms */
const pause = (ms) => new Promise((resolve) => setTimeout(resolve, ms))
