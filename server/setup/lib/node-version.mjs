// @ts-check
/** The versions that the product is built and tested on; the same range stands in package.json under "engines". */
const LEAST_MINOR = 19
const MAJOR = 20

/**
 * Says what is wrong with a version of Node.js, or null when it serves.
 * @param {string} version as in process.versions.node, for example "20.20.2"
 * @returns {string | null}
 */
export function nodeVersionProblem(version) {
  const [major = Number.NaN, minor = Number.NaN] = version.split('.').map(Number)
  if (major === MAJOR && minor >= LEAST_MINOR) return null
  const found = `This is Node.js ${version}. Evenpenny runs on Node.js ${MAJOR}, from ${MAJOR}.${LEAST_MINOR} on.`
  const age = major > MAJOR ? 'is newer than what it is tested on' : 'is too old'
  return `${found} The version found ${age}: put Node.js ${MAJOR} first in PATH (node --version tells which one is) and run the command again.`
}
