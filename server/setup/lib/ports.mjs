// @ts-check
import { createServer } from 'node:net'
import { listenerOn } from './processes.mjs'
import { SetupProblem } from './problem.mjs'

/**
 * Every port that npm start listens on, with the variable that chooses another.
 * @type {ReadonlyArray<{ name: PortName, variable: string, usual: number, what: string }>}
 */
export const PORTS = [
  { name: 'site', variable: 'EVENPENNY_PORT', usual: 4780, what: 'the site' },
  { name: 'database', variable: 'EVENPENNY_DATABASE_PORT', usual: 4781, what: 'PostgreSQL' },
  { name: 's3', variable: 'EVENPENNY_FAKE_S3_PORT', usual: 4782, what: 'the local object store' },
  { name: 'smtp', variable: 'EVENPENNY_FAKE_SMTP_PORT', usual: 4783, what: 'the local mail server' },
  { name: 'mailPage', variable: 'EVENPENNY_FAKE_MAIL_PAGE_PORT', usual: 4784, what: 'the page to read local mail' },
  { name: 'beacon', variable: 'EVENPENNY_FAKE_BEACON_PORT', usual: 4785, what: 'the local beacon' },
  {
    name: 'timestamp',
    variable: 'EVENPENNY_FAKE_TIMESTAMP_PORT',
    usual: 4786,
    what: 'the local timestamp authority',
  },
]

/** @typedef {'site' | 'database' | 's3' | 'smtp' | 'mailPage' | 'beacon' | 'timestamp'} PortName */
/** @typedef {Record<PortName, number>} Ports */

/**
 * The ports to use: the usual ones, or those that the environment names.
 * @param {NodeJS.ProcessEnv} env
 * @returns {Ports}
 */
export function choosePorts(env) {
  /** @type {Partial<Ports>} */
  const chosen = {}
  const users = new Map()
  for (const { name, variable, usual, what } of PORTS) {
    const text = env[variable]
    const port = text === undefined || text === '' ? usual : /^\d{1,5}$/.test(text) ? Number(text) : Number.NaN
    if (!(port >= 1 && port <= 65535)) {
      throw new SetupProblem(`${variable} is "${text}". It must be a port number from 1 to 65535.`)
    }
    const other = users.get(port)
    if (other) {
      throw new SetupProblem(
        `Port ${port} is meant for both ${other.what} and ${what}. Set ${other.variable} or ${variable} to another port.`,
      )
    }
    users.set(port, { what, variable })
    chosen[name] = port
  }
  return /** @type {Ports} */ (chosen)
}

/**
 * Whether something on this machine already listens on a port of loopback, or this user may not.
 * @param {number} port
 * @returns {Promise<'free' | 'taken' | 'forbidden'>}
 */
export function portState(port) {
  return new Promise((resolve, reject) => {
    const server = createServer()
    server.once('error', (/** @type {NodeJS.ErrnoException} */ error) => {
      if (error.code === 'EADDRINUSE') resolve('taken')
      else if (error.code === 'EACCES') resolve('forbidden')
      else reject(error)
    })
    server.listen({ port, host: '127.0.0.1', exclusive: true }, () => server.close(() => resolve('free')))
  })
}

/**
 * Sentences for each port that cannot be used; null when all can.
 * @param {Ports} ports
 * @param {(name: PortName) => boolean} asked which of them to look at
 * @returns {Promise<string | null>}
 */
export async function portProblem(ports, asked = () => true) {
  const lines = []
  for (const { name, variable, what } of PORTS.filter((each) => asked(each.name))) {
    const port = ports[name]
    const state = await portState(port)
    if (state === 'free') continue
    if (state === 'forbidden') {
      lines.push(
        `Port ${port}, for ${what}, is one that this user may not listen on. Choose one above 1023: set ${variable}.`,
      )
      continue
    }
    const holder = listenerOn(port)
    const by = holder ? ` by process ${holder.pid} (${holder.command.slice(0, 80)})` : ''
    lines.push(
      `Port ${port}, for ${what}, is taken${by}. End what listens there, or choose another port: set ${variable}.`,
    )
  }
  return lines.length === 0 ? null : lines.join('\n')
}

/**
 * Ports that nothing listens on now, all different.
 * @param {number} count
 * @returns {Promise<number[]>}
 */
export async function freePorts(count) {
  const servers = await Promise.all(
    Array.from(
      { length: count },
      () =>
        new Promise((/** @type {(server: import('node:net').Server) => void} */ resolve, reject) => {
          const server = createServer()
          server.once('error', reject)
          server.listen({ port: 0, host: '127.0.0.1' }, () => resolve(server))
        }),
    ),
  )
  const ports = servers.map((server) => /** @type {import('node:net').AddressInfo} */ (server.address()).port)
  await Promise.all(servers.map((server) => new Promise((resolve) => server.close(resolve))))
  return ports
}

/** @returns {Promise<Ports>} free ports for a whole stack of tests */
export async function freePortsForAll() {
  const free = await freePorts(PORTS.length)
  return /** @type {Ports} */ (Object.fromEntries(PORTS.map(({ name }, i) => [name, free[i]])))
}
