// @ts-check

/** @typedef {import('./ports.mjs').Ports} Ports */

/** What npm start chooses by itself; set from outside they mean services of one's own, which it does not run. */
const OF_ONE_S_OWN = [
  'EVENPENNY_DATABASE_URL',
  'EVENPENNY_S3_ENDPOINT',
  'EVENPENNY_SMTP_URL',
  'EVENPENNY_BEACON_RELAYS',
  'EVENPENNY_BEACON_NETWORK',
  'EVENPENNY_TIMESTAMP_URLS',
  'EVENPENNY_TIMESTAMP_CERTIFICATES',
]

/**
 * The sentences for an environment that names services of one's own; null for one that does not.
 * @param {NodeJS.ProcessEnv} env
 * @returns {string | null}
 */
export function ownServicesProblem(env) {
  const set = OF_ONE_S_OWN.filter((name) => env[name])
  if (set.length === 0) return null
  return (
    `${set.join(', ')} ${set.length === 1 ? 'is' : 'are'} set, but npm start runs everything on this machine with a ` +
    'database and services of its own. For real services start the processes one by one, as docs/production.md says; ' +
    `for npm start unset ${set.length === 1 ? 'it' : 'them'} first.`
  )
}

/** The AWS SDK prints at every start that its versions from 2027 on want a newer Node.js; ours is pinned, and runs on 20. */
const QUIET_SDK = { AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true' }

/**
 * The environment of the site, the worker, the fakes and their commands on one machine.
 * @param {object} options
 * @param {NodeJS.ProcessEnv} options.base what they get besides; variables that npm adds for its scripts are left out
 * @param {string} options.data
 * @param {Ports} options.ports
 * @param {string} options.databaseUrl
 * @param {boolean} options.dev
 * @returns {NodeJS.ProcessEnv}
 */
export function localEnvironment({ base, data, ports, databaseUrl, dev }) {
  const kept = Object.entries(base).filter(([name]) => !/^npm_/i.test(name) && !name.startsWith('PG'))
  return {
    ...Object.fromEntries(kept),
    ...QUIET_SDK,
    NODE_ENV: dev ? 'development' : 'production',
    EVENPENNY_LOCAL: 'yes',
    ...(dev ? { EVENPENNY_DEV: 'yes' } : {}),
    EVENPENNY_DATA: data,
    EVENPENNY_DATABASE_URL: databaseUrl,
    EVENPENNY_PORT: String(ports.site),
    EVENPENNY_FAKE_S3_PORT: String(ports.s3),
    EVENPENNY_FAKE_SMTP_PORT: String(ports.smtp),
    EVENPENNY_FAKE_MAIL_PAGE_PORT: String(ports.mailPage),
    EVENPENNY_FAKE_BEACON_PORT: String(ports.beacon),
    EVENPENNY_FAKE_TIMESTAMP_PORT: String(ports.timestamp),
  }
}

/**
 * Where the site is opened; server/config takes the same for its own address.
 * @param {Ports} ports
 */
export const siteAddress = (ports) => `http://localhost:${ports.site}`

/**
 * A person's own environment without what would lead tests to a real service, or npm's scripts astray.
 * @param {NodeJS.ProcessEnv} env
 * @returns {NodeJS.ProcessEnv}
 */
export function testEnvironment(env) {
  const kept = Object.entries(env).filter(([name]) => !/^(npm_|EVENPENNY_|PG)/i.test(name) && name !== 'NODE_ENV')
  return { ...Object.fromEntries(kept.filter(([name]) => name !== 'FORCE_COLOR')), ...QUIET_SDK, NO_COLOR: '1' }
}
