// @ts-check
import { mkdirSync } from 'node:fs'
import { join } from 'node:path'
import { answersOk, portOpens, ServiceEnded, startService, waitReady } from './service.mjs'
import { lastLines, run } from './run.mjs'
import { SetupProblem } from './problem.mjs'

/** @typedef {import('./service.mjs').Service} Service */

const TSX = ['--import', 'tsx']
const READY_MS = 60_000
const GRACE_MS = 15_000

/**
 * The services of one machine, in the order in which they start; they stop in the opposite one.
 * @typedef {object} Stack
 * @property {() => Promise<void>} startFakes
 * @property {() => Promise<void>} startWorkerAndSite
 * @property {Promise<never>} failure rejects when a service ends that was not asked to
 * @property {() => number[]} pids of the services that run
 * @property {(graceMs?: number) => Promise<void>} stop
 */

/**
 * @param {object} options
 * @param {string} options.root the checkout
 * @param {NodeJS.ProcessEnv} options.env see localEnvironment
 * @param {import('./ports.mjs').Ports} options.ports
 * @param {string} options.logs folder for log files
 * @param {(line: string) => void} options.onTrouble
 * @param {(pids: readonly number[]) => void} [options.onPids] called when a service starts
 * @param {boolean} [options.ownGroups] see startService
 * @returns {Stack}
 */
export function makeStack({ root, env, ports, logs, onTrouble, onPids, ownGroups = true }) {
  /** @type {Service[]} */
  const services = []
  let stopping = false
  mkdirSync(logs, { recursive: true, mode: 0o700 })
  /** @type {(error: Error) => void} */
  let fail = () => {}
  /** @type {Promise<never>} */
  const failure = new Promise((_resolve, reject) => {
    fail = reject
  })
  failure.catch(() => {})

  const pids = () => services.filter((service) => service.running()).map((service) => service.pid)
  /**
   * @param {string} name
   * @param {string} entry
   * @param {(service: Service, signal: AbortSignal) => Promise<unknown>} ready
   */
  const start = async (name, entry, ready) => {
    if (stopping) return
    const service = startService({
      name,
      args: [...TSX, entry],
      cwd: root,
      env,
      logFile: join(logs, `${name}.log`),
      ownGroup: ownGroups,
      onTrouble: (line) => onTrouble(`${name.padEnd(6)} ${line}`),
    })
    services.push(service)
    onPids?.(pids())
    service.ended.then((how) => {
      if (!stopping) fail(new ServiceEnded(service, `ended ${how}`))
    })
    const giveUp = new AbortController()
    try {
      await waitReady(service, ready(service, giveUp.signal), READY_MS)
    } finally {
      giveUp.abort()
    }
  }
  const fakePorts = [ports.s3, ports.smtp, ports.mailPage, ports.beacon, ports.timestamp]
  return {
    failure,
    pids,
    startFakes: () =>
      start('fakes', 'server/fakes/main.ts', (_service, signal) =>
        Promise.all(fakePorts.map((port) => portOpens(port, signal))),
      ),
    async startWorkerAndSite() {
      await start('worker', 'server/worker.ts', (service) => service.sawLine('worker ready'))
      await start('site', 'server/main.ts', (_service, signal) =>
        answersOk(`http://127.0.0.1:${ports.site}/healthz`, signal),
      )
    },
    async stop(graceMs = GRACE_MS) {
      stopping = true
      for (const service of services.toReversed()) await service.stop(graceMs)
    },
  }
}

/**
 * Runs one of the product's own commands to its end.
 * @param {string} root
 * @param {NodeJS.ProcessEnv} env
 * @param {string} script path under the root
 * @param {string} what for the message: "The migration of the database"
 */
export async function runScript(root, env, script, what) {
  const done = await run(process.execPath, [...TSX, script], { cwd: root, env, timeoutMs: 10 * 60_000 })
  if (done.code !== 0) {
    throw new SetupProblem(`${what} failed (${script}). Its last lines:\n${lastLines(done.output, 25)}`)
  }
}

export const migrate = (/** @type {string} */ root, /** @type {NodeJS.ProcessEnv} */ env) =>
  runScript(root, env, 'server/store/migrate.ts', 'The migration of the database')

export const seedDemo = (/** @type {string} */ root, /** @type {NodeJS.ProcessEnv} */ env) =>
  runScript(root, env, 'server/cli/seed-demo.ts', 'Making the demo data')
