// @ts-check
import { buildDigest, buildOutdated, packagesOutdated, packagesState, stampBuild, stampPackages } from './stamps.mjs'
import { lastLines, run } from './run.mjs'
import { SetupProblem } from './problem.mjs'

/**
 * Installs the npm packages when node_modules is missing, cut off or older than the lock file.
 * @param {string} root
 * @param {(line: string) => void} say
 */
export async function ensurePackages(root, say) {
  if (packagesOutdated(packagesState(root))) {
    say('Installing the npm packages (about a minute).')
    const started = Date.now()
    // The build and the tests need the development packages, whatever NODE_ENV says.
    const done = await run('npm', ['ci', '--include=dev', '--no-audit', '--no-fund'], {
      cwd: root,
      timeoutMs: 20 * 60_000,
    })
    if (done.code === 127)
      throw new SetupProblem('npm was not found. Install npm 10 or newer and run the command again.')
    if (done.code !== 0) {
      throw new SetupProblem(
        `npm ci failed. Its last lines:\n${lastLines(done.output, 20)}\n` +
          'If that is a network error, run the command again; what was half installed is replaced.',
      )
    }
    say(`The npm packages are installed (${seconds(started)}).`)
  }
  stampPackages(root)
}

/**
 * Builds the site when its sources differ from those of the last build.
 * @param {string} root
 * @param {(line: string) => void} say
 */
export async function ensureBuild(root, say) {
  if (!buildOutdated(root)) return
  say('Building the site.')
  const started = Date.now()
  const digest = buildDigest(root)
  const env = { ...process.env, NODE_ENV: 'production', NO_COLOR: '1' }
  const done = await run('npm', ['run', '--silent', 'build'], { cwd: root, env, timeoutMs: 10 * 60_000 })
  if (done.code !== 0) throw new SetupProblem(`The build failed. Its last lines:\n${lastLines(done.output, 30)}`)
  stampBuild(root, digest)
  say(`The site is built (${seconds(started)}).`)
}

/** @param {number} since milliseconds */
export const seconds = (since) => `${((Date.now() - since) / 1000).toFixed(1)} s`
