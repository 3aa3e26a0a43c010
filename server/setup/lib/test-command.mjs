// @ts-check
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { addCounts, closingLine, oneFailed } from './counts.mjs'
import { installDebianPackages, missingBrowserPackages } from './debian.mjs'
import { testEnvironment } from './environment.mjs'
import { ensureBuild, ensurePackages } from './npm-steps.mjs'
import { findPostgres } from './postgres-programs.mjs'
import { describeFailure } from './problem.mjs'
import { ROOT } from './root.mjs'
import { endRunning } from './run.mjs'
import { interruption, listenForSignals } from './signals.mjs'
import { readTestOptions } from './test-options.mjs'
import { runPart } from './test-parts.mjs'
import { startThrowawayCluster } from './throwaway-cluster.mjs'

/**
 * Sets up and runs the tests; the last line that it prints is the count.
 * @param {readonly string[]} args
 * @param {NodeJS.ProcessEnv} env
 * @returns {Promise<number>} exit code: 0 only if something passed and nothing failed
 */
export async function testCommand(args, env) {
  const say = (/** @type {string} */ line) => console.log(line)
  /** @type {import('./counts.mjs').Counts[]} */
  const results = []
  /** @type {Array<() => Promise<void>>} */
  const cleanUps = []
  const close = () => {
    const counts = addCounts(results.length > 0 ? results : [oneFailed('the set-up')])
    if (counts.skipped > 0) say(`\nSkipped:\n${counts.skippedNames.map((name) => `  ${name}`).join('\n')}`)
    if (counts.failed > 0) say(`\nFailed:\n${counts.failures.map((name) => `  ${name}`).join('\n')}`)
    say(`\n${closingLine(counts)}`)
    return counts.failed === 0 && counts.passed > 0 ? 0 : 1
  }
  const { receive, isInterrupted } = interruption({
    onFirst(signal) {
      say(`\nStopped by ${signal}: ending the tests.`)
      endRunning('SIGTERM')
    },
    onSecond: () => endRunning('SIGKILL'),
  })
  listenForSignals(receive, env)
  for (const event of /** @type {const} */ (['uncaughtException', 'unhandledRejection'])) {
    process.on(event, (error) => {
      say(`The test script itself failed:\n${describeFailure(error)}`)
      results.push(oneFailed('the test script'))
      endRunning('SIGKILL')
      Promise.allSettled(cleanUps.map((cleanUp) => cleanUp())).then(() => process.exit(close() || 1))
    })
  }
  try {
    await runParts(args, env, say, results, cleanUps, isInterrupted)
  } catch (error) {
    say(`\n${describeFailure(error)}`)
    // A set-up that fails is the one failure, as nothing else was tried.
    results.push(oneFailed('the set-up'))
  }
  if (isInterrupted()) results.push(oneFailed('the tests were stopped before their end'))
  for (const cleanUp of cleanUps.reverse()) await cleanUp()
  return close()
}

/**
 * @param {readonly string[]} args
 * @param {NodeJS.ProcessEnv} env
 * @param {(line: string) => void} say
 * @param {import('./counts.mjs').Counts[]} results
 * @param {Array<() => Promise<void>>} cleanUps
 * @param {() => boolean} isInterrupted
 */
async function runParts(args, env, say, results, cleanUps, isInterrupted) {
  const { parts, patterns } = readTestOptions(args)
  const needsDatabase = parts.includes('unit') || parts.includes('e2e')
  const missing = needsDatabase && findPostgres().length === 0 ? ['postgresql'] : []
  if (parts.includes('e2e')) missing.push(...missingBrowserPackages())
  await installDebianPackages(missing, say)
  await ensurePackages(ROOT, say)
  const reports = mkdtempSync(join(tmpdir(), 'evenpenny-reports-'))
  cleanUps.push(async () => rmSync(reports, { recursive: true, force: true }))
  const testEnv = testEnvironment(env)
  if (needsDatabase) {
    say('Starting a throw-away PostgreSQL.')
    const cluster = await startThrowawayCluster()
    cleanUps.push(cluster.stop)
    testEnv.EVENPENNY_TEST_DATABASE_URL = cluster.url
    await ensureBuild(ROOT, say)
  }
  for (const part of parts) {
    if (isInterrupted()) return
    results.push(await runPart(part, { root: ROOT, reports, env: testEnv, patterns, say }))
  }
}
