// @ts-check
import { existsSync, readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { countCommand, countPlaywright, countVitest, oneFailed } from './counts.mjs'
import { seconds } from './npm-steps.mjs'
import { run } from './run.mjs'

/** @typedef {import('./counts.mjs').Counts} Counts */

/**
 * @typedef {object} PartContext
 * @property {string} root
 * @property {string} reports folder for the runners' reports
 * @property {NodeJS.ProcessEnv} env
 * @property {readonly string[]} patterns
 * @property {(line: string) => void} say
 */

/** Time limits in minutes; together with the set-up they stay below an hour. */
const LIMITS = { typecheck: 5, lint: 5, unit: 20, e2e: 20 }

/**
 * Runs one part and counts it.
 * @param {import('./test-options.mjs').Part} part
 * @param {PartContext} context
 * @returns {Promise<Counts>}
 */
export async function runPart(part, context) {
  const { root, say, patterns } = context
  say(`\n== ${part}`)
  const started = Date.now()
  const report = join(context.reports, `${part}.json`)
  rmSync(report, { force: true })
  const env = { ...context.env }
  /** @type {string[]} */
  const more = []
  if (part === 'unit') more.push('--reporter=default', '--reporter=json', `--outputFile.json=${report}`, ...patterns)
  if (part === 'e2e') {
    env.EVENPENNY_E2E_REPORT = report
    more.push(...patterns)
  }
  const args = ['run', '--silent', part, ...(more.length > 0 ? ['--', ...more] : [])]
  const done = await run('npm', args, {
    cwd: root,
    env,
    timeoutMs: LIMITS[part] * 60_000,
    onOutput: (text) => process.stdout.write(text),
  })
  const text = existsSync(report) ? readFileSync(report, 'utf8') : null
  const counts = done.timedOut
    ? oneFailed(`${part} was not done within ${LIMITS[part]} minutes and was ended`)
    : part === 'unit'
      ? countVitest(text, done.code)
      : part === 'e2e'
        ? countPlaywright(text, done.code)
        : countCommand(part, done.code)
  say(`-- ${part}: ${counts.passed} passed, ${counts.failed} failed, ${counts.skipped} skipped (${seconds(started)})`)
  return counts
}
