import pino from 'pino'
import { noteSiteKeys } from '#server/commands/note-site-keys.ts'
import { loadConfig } from '#server/config/config.ts'
import { ConfigError } from '#server/config/config-error.ts'
import { crashAt } from '#server/jobs/crash-points.ts'
import { runWorker } from '#server/jobs/run-worker.ts'
import { createServices } from '#server/services.ts'

/** The worker: works off the queue until SIGTERM or SIGINT. Prints "worker ready" when it has begun. */
async function main(): Promise<void> {
  const config = loadConfig()
  const log = pino({ level: config.logLevel, name: 'worker' })
  const services = createServices(config, { name: 'evenpenny worker', jobExpirySeconds: config.jobExpirySeconds })
  await noteSiteKeys(services)
  const worker = await runWorker(services, {
    databaseUrl: config.databaseUrl,
    afterWrite: crashAt(config.crashAt),
    onTrouble: (words) => log.warn(words),
  })
  let stopping = false
  const stop = () => {
    if (stopping) return
    stopping = true
    worker
      .stop()
      .then(() => services.close())
      .then(
        () => process.exit(0),
        (error: unknown) => {
          log.error(error, 'The worker could not stop cleanly.')
          process.exit(1)
        },
      )
  }
  process.on('SIGTERM', stop)
  process.on('SIGINT', stop)
  console.log('worker ready')
}

main().catch((error: unknown) => {
  console.error(error instanceof ConfigError ? error.message : error)
  process.exit(1)
})
