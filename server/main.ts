import { readFileSync } from 'node:fs'
import { createServer } from 'node:http'
import { fileURLToPath } from 'node:url'
import { pino } from 'pino'
import { createPasswords } from '#server/adapters/passwords/passwords.ts'
import { createSite } from '#server/app.ts'
import { noteSiteKeys } from '#server/commands/note-site-keys.ts'
import { loadConfig } from '#server/config/config.ts'
import { ConfigError } from '#server/config/config-error.ts'
import { loadRenderer } from '#server/http/pages/renderer.ts'
import { createServices } from '#server/services.ts'

const ROOT = fileURLToPath(new URL('..', import.meta.url))
const BUILD = `${ROOT}build`
/** Requests under way get this long to end when the site stops, in milliseconds. */
const GRACE_MS = 10_000

/** Listens until it is asked to stop (SIGTERM, SIGINT); then finishes what is under way. */
async function main(): Promise<void> {
  const config = loadConfig()
  const logger = pino({ level: config.logLevel, base: { service: 'site' } })
  const services = createServices(config, { name: 'evenpenny site' })
  await noteSiteKeys(services)
  const passwords = createPasswords()
  const { version } = JSON.parse(readFileSync(`${ROOT}package.json`, 'utf8')) as { version: string }
  const development = config.dev
    ? await (await import('#server/http/pages/development.ts')).startDevelopment(ROOT)
    : null
  const renderer = development?.renderer ?? (await loadRenderer(BUILD))
  const site = createSite({
    config,
    services,
    passwords,
    renderer,
    logger,
    build: BUILD,
    version,
    ...(development ? { before: development.mount } : {}),
  })
  const server = createServer(site.listener)
  // Slow senders of headers are cut off; an upload of 200 MB over a slow line may take its time.
  server.headersTimeout = 20_000
  server.requestTimeout = 30 * 60_000
  server.keepAliveTimeout = 65_000

  let stopping = false
  const stop = (signal: string) => {
    if (stopping) return
    stopping = true
    logger.info({ signal }, 'stopping')
    const force = setTimeout(() => server.closeAllConnections(), GRACE_MS)
    server.close(() => {
      clearTimeout(force)
      Promise.all([site.close(), passwords.close(), development?.close()])
        .then(() => services.close())
        .catch((error: unknown) => {
          logger.error({ err: error }, 'stopping')
          process.exitCode = 1
        })
    })
    server.closeIdleConnections()
  }
  process.on('SIGTERM', () => stop('SIGTERM'))
  process.on('SIGINT', () => stop('SIGINT'))

  await new Promise<void>((resolve, reject) => {
    server.once('error', reject)
    server.listen(config.port, config.host, resolve)
  })
  logger.info({ host: config.host, port: config.port, origin: config.origin }, 'site ready')
}

main().catch((error: unknown) => {
  if (error instanceof ConfigError) console.error(error.message)
  else if ((error as NodeJS.ErrnoException).code === 'EADDRINUSE') {
    console.error("Another program listens on the site's port already. Stop it, or set EVENPENNY_PORT to another port.")
  } else console.error(error)
  process.exit(1)
})
