// @ts-check
import { existsSync } from 'node:fs'
import { lastLines, run } from './run.mjs'
import { SetupProblem } from './problem.mjs'

/**
 * @typedef {object} Machine
 * @property {boolean} root
 * @property {boolean} apt apt-get is there
 * @property {'none' | 'free' | 'asks'} sudo whether sudo is missing or refuses, works without a password, or can ask
 *   for one because there is a terminal
 */

/**
 * The command line that stands before apt-get, or the sentences that say why nothing can be installed from here.
 * @param {readonly string[]} packages Debian package names, at least one
 * @param {Machine} machine
 * @returns {{ prefix: string[] } | { problem: string }}
 */
export function installPlan(packages, machine) {
  const names = packages.join(' ')
  const needed =
    packages.length === 1 ? `The Debian package ${names} is needed` : `The Debian packages ${names} are needed`
  if (!machine.apt) {
    return {
      problem: `${needed}, and this machine has no apt-get. Install the same programs in this system's own way.`,
    }
  }
  if (machine.root) return { prefix: [] }
  if (machine.sudo === 'free') return { prefix: ['sudo', '-n'] }
  if (machine.sudo === 'asks') return { prefix: ['sudo'] }
  return {
    problem:
      `${needed}, and this user may not install any (not root, and no sudo). ` +
      `Ask whoever looks after this machine to run:\n  apt-get install -y --no-install-recommends ${names}\n` +
      'and then run the command again.',
  }
}

/** @returns {Promise<Machine>} */
export async function thisMachine() {
  const root = process.getuid?.() === 0
  const apt = (await run('apt-get', ['--version'])).code === 0
  if (root) return { root, apt, sudo: 'none' }
  // -n never asks: it fails at once when a password would be needed.
  const sudo = await run('sudo', ['-n', 'true'])
  if (sudo.code === 0) return { root, apt, sudo: 'free' }
  const canAsk = sudo.code !== 127 && process.stdin.isTTY === true
  return { root, apt, sudo: canAsk ? 'asks' : 'none' }
}

/**
 * Installs Debian packages, all in one go.
 * @param {readonly string[]} packages nothing happens for none
 * @param {(line: string) => void} say
 */
export async function installDebianPackages(packages, say) {
  if (packages.length === 0) return
  const plan = installPlan(packages, await thisMachine())
  if ('problem' in plan) throw new SetupProblem(plan.problem)
  say(`Installing from Debian: ${packages.join(', ')}.`)
  const terminal = plan.prefix.length === 1
  // Without env, sudo would drop the variable that keeps debconf from asking questions.
  const apt = (/** @type {string[]} */ ...args) => {
    const words = [...plan.prefix, 'env', 'DEBIAN_FRONTEND=noninteractive', 'apt-get', '-q', ...args]
    return run(/** @type {string} */ (words[0]), words.slice(1), { terminal, timeoutMs: 15 * 60_000 })
  }
  const install = () => apt('install', '-y', '--no-install-recommends', ...packages)
  // Old lists name files that are gone, a new machine has none: refresh first, and go on if that fails.
  const update = await apt('update')
  const done = await install()
  if (done.code === 0) return
  const names = packages.join(' ')
  throw new SetupProblem(
    `apt-get could not install ${names}. Its last lines were:\n${lastLines(done.output, 12)}\n` +
      (update.code === 0 ? '' : `apt-get update had failed before:\n${lastLines(update.output, 6)}\n`) +
      `Mend that (or install ${names} by hand) and run the command again.`,
  )
}

export const CHROMIUM = '/usr/bin/chromium'

/** @returns {string[]} the Debian packages that the browser tests still need */
export function missingBrowserPackages() {
  return existsSync(CHROMIUM) ? [] : ['chromium']
}
