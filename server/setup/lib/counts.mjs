// @ts-check
/**
 * @typedef {object} Counts
 * @property {number} passed
 * @property {number} failed
 * @property {number} skipped
 * @property {string[]} skippedNames
 * @property {string[]} failures for the summary: what failed, one line each
 */

/** @returns {Counts} */
export const noCounts = () => ({ passed: 0, failed: 0, skipped: 0, skippedNames: [], failures: [] })

/** @param {string} name @returns {Counts} */
export const oneFailed = (name) => ({ ...noCounts(), failed: 1, failures: [name] })

/**
 * A command that counts as one test.
 * @param {string} name
 * @param {number | null} code exit code
 * @returns {Counts}
 */
export function countCommand(name, code) {
  return code === 0 ? { ...noCounts(), passed: 1 } : oneFailed(name)
}

/** @param {readonly Counts[]} all @returns {Counts} */
export function addCounts(all) {
  return all.reduce(
    (sum, each) => ({
      passed: sum.passed + each.passed,
      failed: sum.failed + each.failed,
      skipped: sum.skipped + each.skipped,
      skippedNames: [...sum.skippedNames, ...each.skippedNames],
      failures: [...sum.failures, ...each.failures],
    }),
    noCounts(),
  )
}

/**
 * The last line of npm test.
 * @param {Counts} counts
 */
export function closingLine({ passed, failed, skipped }) {
  return `${passed} passed, ${failed} failed${skipped > 0 ? `, ${skipped} skipped` : ''}`
}

/**
 * Counts a run of Vitest from its JSON report. A file that cannot be loaded and a hook that fails count one each, and so
 * does a runner that failed otherwise or left no report: nothing that went wrong may count as nothing.
 * @param {string | null} report text of the report, null when there is none
 * @param {number | null} code the runner's exit code
 * @returns {Counts}
 */
export function countVitest(report, code) {
  const parsed = parseReport(report)
  if (!Array.isArray(parsed?.testResults)) return oneFailed(`vitest ended with exit code ${code} and left no report`)
  const counts = noCounts()
  for (const file of parsed.testResults) {
    const tests = Array.isArray(file.assertionResults) ? file.assertionResults : []
    let failedHere = 0
    for (const test of tests) {
      const name = `${file.name} > ${test.fullName}`
      if (test.status === 'passed') {
        counts.passed += 1
      } else if (test.status === 'failed') {
        failedHere += 1
        counts.failures.push(name)
      } else {
        counts.skipped += 1
        counts.skippedNames.push(name)
      }
    }
    if (file.status === 'failed' && failedHere === 0) {
      failedHere = 1
      counts.failures.push(`${file.name} (the file itself, or a hook in it)`)
    }
    counts.failed += failedHere
  }
  return withExitCode(counts, code, 'vitest')
}

/**
 * Counts a run of Playwright from its JSON report, by the same rules. A test that passed only when tried again counts as
 * failed.
 * @param {string | null} report
 * @param {number | null} code
 * @returns {Counts}
 */
export function countPlaywright(report, code) {
  const parsed = parseReport(report)
  if (!Array.isArray(parsed?.suites)) return oneFailed(`playwright ended with exit code ${code} and left no report`)
  const counts = noCounts()
  const walk = (/** @type {any} */ suite, /** @type {string} */ path) => {
    for (const spec of suite.specs ?? []) {
      for (const test of spec.tests ?? []) {
        const name = `${path} > ${spec.title}`
        if (test.status === 'expected') {
          counts.passed += 1
        } else if (test.status === 'skipped') {
          counts.skipped += 1
          counts.skippedNames.push(name)
        } else {
          counts.failed += 1
          counts.failures.push(name)
        }
      }
    }
    for (const inner of suite.suites ?? []) walk(inner, `${path} > ${inner.title}`)
  }
  for (const suite of parsed.suites) walk(suite, suite.title)
  for (const error of parsed.errors ?? []) {
    counts.failed += 1
    counts.failures.push(`playwright: ${String(error.message ?? error).split('\n')[0]}`)
  }
  return withExitCode(counts, code, 'playwright')
}

/** @param {Counts} counts @param {number | null} code @param {string} runner @returns {Counts} */
function withExitCode(counts, code, runner) {
  if (counts.failed === 0 && code !== 0) {
    return addCounts([counts, oneFailed(`${runner} ended with exit code ${code} though no test failed`)])
  }
  if (counts.passed + counts.failed === 0) return addCounts([counts, oneFailed(`${runner} ran no test`)])
  return counts
}

/** @param {string | null} report @returns {any} */
function parseReport(report) {
  try {
    return report === null ? null : JSON.parse(report)
  } catch {
    return null
  }
}
