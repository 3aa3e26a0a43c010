// @ts-check
import { accessSync, constants, existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join, relative, resolve } from 'node:path'
import { serverRuns, stopCluster } from './cluster.mjs'
import { serverLog } from './cluster-place.mjs'
import { installDebianPackages } from './debian.mjs'
import { localEnvironment, ownServicesProblem } from './environment.mjs'
import { ensureBuild, ensurePackages } from './npm-steps.mjs'
import { choosePorts, portProblem } from './ports.mjs'
import { findPostgres } from './postgres-programs.mjs'
import { describeFailure, SetupProblem } from './problem.mjs'
import { startProjectCluster } from './project-cluster.mjs'
import { ROOT } from './root.mjs'
import { endRunning } from './run.mjs'
import { takeRunLock } from './run-lock.mjs'
import { ServiceEnded } from './service.mjs'
import { interruption, listenForSignals } from './signals.mjs'
import { makeStack, migrate, seedDemo } from './stack.mjs'
import { welcome } from './welcome.mjs'

/** @typedef {(line: string) => void} Say */

/**
 * Sets up and runs everything until it is asked to stop.
 * @param {readonly string[]} args
 * @param {NodeJS.ProcessEnv} env
 * @returns {Promise<number>} exit code: 0 when it was asked to stop and everything did
 */
export async function startCommand(args, env) {
  const say = (/** @type {string} */ line) => console.log(line)
  // The terminal may be gone (SIGHUP): what is still said then must not cut the stopping short.
  for (const stream of [process.stdout, process.stderr]) stream.on('error', () => {})
  const held = new Held()
  const { interrupted, receive, isInterrupted } = interruption({
    onFirst() {
      say('\nStopping. Press Ctrl-C again to force it.')
      endRunning('SIGTERM')
    },
    onSecond() {
      say('Stopping at once.')
      endRunning('SIGKILL')
      held.release(true).finally(() => process.exit(1))
    },
  })
  listenForSignals(receive, env)

  let code = 0
  try {
    await setUpAndRun(args, env, say, held, interrupted)
  } catch (error) {
    // What was cut off by the signal fails too; that is no news.
    if (!isInterrupted()) {
      code = 1
      console.error(`\n${describeFailure(error)}`)
      endRunning('SIGTERM')
    }
  }
  if (!(await held.release(false))) {
    console.error('PostgreSQL did not stop within half a minute. The next npm start stops it first.')
    return 1
  }
  if (code === 0) say('Stopped.')
  return code
}

/** What must be let go of at the end, the last taken first. */
class Held {
  /** @type {Array<(atOnce: boolean) => Promise<boolean>>} */
  #releases = []

  /** @param {(atOnce: boolean) => Promise<boolean>} release false when it could not */
  add(release) {
    this.#releases.push(release)
  }

  /** @param {boolean} atOnce */
  async release(atOnce) {
    let all = true
    for (const release of [...this.#releases].reverse()) all = (await release(atOnce)) && all
    return all
  }
}

/**
 * @param {readonly string[]} args
 * @param {NodeJS.ProcessEnv} env
 * @param {Say} say
 * @param {Held} held
 * @param {Promise<never>} interrupted
 * @returns {Promise<never>} ends only by throwing
 */
async function setUpAndRun(args, env, say, held, interrupted) {
  const unknown = args.find((arg) => arg !== '--dev')
  if (unknown !== undefined) throw new SetupProblem(`npm start does not know "${unknown}". It takes --dev or nothing.`)
  const own = ownServicesProblem(env)
  if (own) throw new SetupProblem(own)
  const data = resolve(env.EVENPENNY_DATA || join(ROOT, '.data'))
  const ports = choosePorts(env)
  makeDataFolder(data)
  const lock = await takeRunLock(data, say)
  held.add(async () => {
    lock.release()
    return true
  })
  const taken = await portProblem(ports, (name) => name !== 'database')
  if (taken) throw new SetupProblem(taken)

  await installDebianPackages(findPostgres().length === 0 ? ['postgresql'] : [], say)
  await ensurePackages(ROOT, say)
  const { cluster, url, isNew } = await startProjectCluster(data, ports, say, (starting) => {
    held.add((atOnce) => stopCluster(starting, atOnce ? 'immediate' : 'fast'))
  })
  const environment = localEnvironment({ base: env, data, ports, databaseUrl: url, dev: args.includes('--dev') })
  await migrate(ROOT, environment)
  await ensureBuild(ROOT, say)

  const stack = makeStack({
    root: ROOT,
    env: environment,
    ports,
    logs: join(data, 'logs'),
    onTrouble: (line) => console.error(line),
    onPids: lock.record,
  })
  held.add(async (atOnce) => {
    await stack.stop(atOnce ? 0 : undefined)
    return true
  })
  const serving = async () => {
    await stack.startFakes()
    await seedOnce(data, isNew, environment, say)
    await stack.startWorkerAndSite()
    say(
      welcome({
        data: relative(process.cwd(), data) || '.',
        ports,
        signIns: readKept(data, 'demo-sign-ins.json') ?? [],
        nextDraw: readKept(data, 'demo-next-draw.json'),
        now: new Date(),
      }),
    )
    return databaseEnds(cluster.place)
  }
  await Promise.race([serving(), stack.failure, interrupted]).catch((error) => {
    // The services end too when their database does: name the cause first.
    if (!(error instanceof ServiceEnded) || serverRuns(cluster.place)) throw error
    throw new SetupProblem(`${databaseEnded(cluster.place)}\n${error.message}`)
  })
  throw new Error('Nothing holds the services any more.')
}

/** @param {string} data */
function makeDataFolder(data) {
  try {
    // Others may pass through (PostgreSQL's user must, when root runs this), not look around.
    mkdirSync(data, { recursive: true, mode: 0o711 })
    accessSync(data, constants.W_OK | constants.X_OK)
  } catch (error) {
    const { code } = /** @type {NodeJS.ErrnoException} */ (error)
    throw new SetupProblem(
      `The data folder ${data} cannot be written to (${code}). Give this user the right to, or set EVENPENNY_DATA to another folder.`,
    )
  }
}

/**
 * Makes the demo data unless an earlier start has finished doing so.
 * @param {string} data
 * @param {boolean} isNew the database is, whatever the data folder remembers
 * @param {NodeJS.ProcessEnv} environment
 * @param {Say} say
 */
async function seedOnce(data, isNew, environment, say) {
  const mark = join(data, 'demo-made')
  if (existsSync(mark) && !isNew) return
  say('Making the demo data.')
  await seedDemo(ROOT, environment)
  writeFileSync(mark, '')
}

/**
 * Rejects when PostgreSQL ends by itself.
 * @param {string} place
 * @returns {Promise<never>}
 */
function databaseEnds(place) {
  return new Promise((_resolve, reject) => {
    const timer = setInterval(() => {
      if (serverRuns(place)) return
      clearInterval(timer)
      reject(new SetupProblem(databaseEnded(place)))
    }, 1000)
    timer.unref()
  })
}

/** What the making of the demo data left in the data folder; null where it made none. @param {string} data @param {string} name */
function readKept(data, name) {
  const file = join(data, name)
  return existsSync(file) ? JSON.parse(readFileSync(file, 'utf8')) : null
}

/** @param {string} place */
const databaseEnded = (place) => `PostgreSQL has ended by itself. Its log is ${serverLog(place)}.`
