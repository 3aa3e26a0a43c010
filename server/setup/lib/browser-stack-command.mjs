// @ts-check
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { randomBytes } from 'node:crypto'
import { createTestDatabase } from './test-database.mjs'
import { localEnvironment, siteAddress, testEnvironment } from './environment.mjs'
import { ensureKeys } from './keys.mjs'
import { ensureBuild } from './npm-steps.mjs'
import { freePortsForAll } from './ports.mjs'
import { describeFailure } from './problem.mjs'
import { ROOT } from './root.mjs'
import { endRunning } from './run.mjs'
import { interruption, listenForSignals } from './signals.mjs'
import { makeStack, migrate, seedDemo } from './stack.mjs'
import { startThrowawayCluster } from './throwaway-cluster.mjs'

/**
 * @param {NodeJS.ProcessEnv} env EVENPENNY_TEST_DATABASE_URL names a running test cluster; without it one is started
 * @returns {Promise<number>} exit code
 */
export async function browserStack(env) {
  const say = (/** @type {string} */ line) => console.error(line)
  /** @type {Array<() => Promise<void>>} */
  const cleanUps = []
  const { interrupted, isInterrupted, receive } = interruption({
    onFirst: () => endRunning('SIGTERM'),
    onSecond: () => endRunning('SIGKILL'),
  })
  listenForSignals(receive, env)
  // The runner may die without a word: its end of the pipe closes with it.
  process.stdin.resume().on('end', () => receive('the end of standard input'))
  let code = 0
  try {
    const data = mkdtempSync(join(tmpdir(), 'evenpenny-e2e-'))
    cleanUps.push(async () => rmSync(data, { recursive: true, force: true }))
    ensureKeys(data, null)
    await ensureBuild(ROOT, say)
    let clusterUrl = env.EVENPENNY_TEST_DATABASE_URL
    if (!clusterUrl) {
      const cluster = await startThrowawayCluster()
      cleanUps.push(cluster.stop)
      clusterUrl = cluster.url
    }
    const databaseUrl = await createTestDatabase(clusterUrl, `browser_${randomBytes(6).toString('hex')}`)
    const ports = await freePortsForAll()
    // Specs may hold the beacon back and let it go.
    const base = { ...testEnvironment(env), EVENPENNY_FAKE_CONTROL: 'yes' }
    const environment = localEnvironment({ base, data, ports, databaseUrl, dev: false })
    await migrate(ROOT, environment)
    // A runner that is killed must take the services with it.
    const stack = makeStack({
      root: ROOT,
      env: environment,
      ports,
      logs: join(data, 'logs'),
      onTrouble: say,
      ownGroups: false,
    })
    cleanUps.push(stack.stop)
    const starting = async () => {
      await stack.startFakes()
      if (env.EVENPENNY_E2E_SEED !== 'no') await seedDemo(ROOT, environment)
      await stack.startWorkerAndSite()
    }
    await Promise.race([starting(), stack.failure, interrupted])
    const local = (/** @type {number} */ port) => `http://127.0.0.1:${port}`
    const addresses = {
      site: siteAddress(ports),
      mailPage: local(ports.mailPage),
      beacon: local(ports.beacon),
      timestamp: local(ports.timestamp),
      s3: local(ports.s3),
      smtp: `smtp://127.0.0.1:${ports.smtp}`,
      databaseUrl,
      data,
      signIns:
        env.EVENPENNY_E2E_SEED === 'no' ? [] : JSON.parse(readFileSync(join(data, 'demo-sign-ins.json'), 'utf8')),
    }
    process.stdout.write(`${JSON.stringify(addresses)}\n`)
    await Promise.race([stack.failure, interrupted])
  } catch (error) {
    if (!isInterrupted()) {
      code = 1
      say(describeFailure(error))
    }
  }
  endRunning('SIGTERM')
  for (const cleanUp of cleanUps.reverse()) await cleanUp()
  process.stdin.destroy()
  return code
}
