// @ts-check
import { SetupProblem } from './problem.mjs'

/** The parts of npm test, in the order in which they run. */
export const PARTS = /** @type {const} */ (['typecheck', 'lint', 'unit', 'e2e'])

/** @typedef {typeof PARTS[number]} Part */
/** @typedef {{ parts: Part[], patterns: string[] }} TestOptions */

/**
 * Reads the words behind "npm test --".
 * @param {readonly string[]} args `--only PART` (or `--only=PART`), and patterns of test files
 * @returns {TestOptions}
 */
export function readTestOptions(args) {
  /** @type {Part[] | null} */
  let parts = null
  const patterns = []
  for (let i = 0; i < args.length; i += 1) {
    const arg = args[i] ?? ''
    if (arg === '--only' || arg.startsWith('--only=')) {
      const name = arg === '--only' ? args[(i += 1)] : arg.slice('--only='.length)
      const part = PARTS.find((each) => each === name)
      if (!part) throw new SetupProblem(`--only takes one of ${PARTS.join(', ')}, not "${name ?? ''}".`)
      parts = [...(parts ?? []), part]
    } else if (arg.startsWith('-')) {
      throw new SetupProblem(`npm test does not know "${arg}". It takes --only and patterns of test files.`)
    } else {
      patterns.push(arg)
    }
  }
  // A pattern names test files: type-check and lint have none.
  const usual = patterns.length > 0 ? /** @type {Part[]} */ (['unit', 'e2e']) : [...PARTS]
  return { parts: parts ?? usual, patterns }
}
