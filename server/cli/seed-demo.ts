import { renameSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { asc, eq } from 'drizzle-orm'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { DEMO_SIGN_INS, makeDemoPeople } from '#server/cli/demo/demo-people.ts'
import { makeDemoDraws } from '#server/cli/demo/demo-draws.ts'
import { ConfigError } from '#server/config/config-error.ts'
import { type Config, loadConfig } from '#server/config/config.ts'
import { servicesNotLocal } from '#server/config/local-services.ts'
import { createServices, type Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'

/** Makes the demo data that is missing; on a second run there is nothing to do. Refuses where any service is real. */
export async function seedDemo(config: Config, now: () => Date = () => new Date()): Promise<void> {
  const real = servicesNotLocal({
    databaseUrl: config.databaseUrl,
    objectStoreEndpoint: config.objectStore.endpoint,
    smtpUrl: config.mail.url,
    beaconRelays: config.beacon.relays,
    timestampUrls: config.timestamps.urls,
    origin: config.origin,
  })
  if (!config.demo || !config.local || real.length > 0 || config.beacon.networkName !== 'development') {
    const why = real.length > 0 ? ` ${real.join(', ')} is real.` : ''
    throw new ConfigError([`Demo data is made only where every service is a local fake.${why}`])
  }
  const clock = settableClock(now())
  const services = createServices(config, { name: 'evenpenny demo data', clock })
  try {
    const offices = await makeDemoPeople(services)
    await makeDemoDraws(services, clock, offices, now)
    keep(config, 'demo-next-draw.json', await nextDraw(services))
  } finally {
    await services.close()
  }
  keep(config, 'demo-sign-ins.json', DEMO_SIGN_INS)
}

/** The sealed draw that is drawn first: npm start tells a newcomer where to watch it. */
async function nextDraw({ db }: Pick<Services, 'db'>) {
  const [next] = await db
    .select({ title: draw.title, slug: draw.slug, drawAt: draw.drawAt })
    .from(draw)
    .where(eq(draw.state, 'sealed'))
    .orderBy(asc(draw.drawAt))
    .limit(1)
  return next ?? null
}

/** Writes a file of the data folder for npm start to read, whole or not at all. */
function keep(config: Config, name: string, value: unknown): void {
  const path = join(config.data, name)
  writeFileSync(`${path}.new`, `${JSON.stringify(value, null, 2)}\n`, { mode: 0o600 })
  renameSync(`${path}.new`, path)
}

if (process.argv[1]?.endsWith('seed-demo.ts')) {
  seedDemo(loadConfig()).then(
    () => console.log('The demo data is there.'),
    (error: unknown) => {
      console.error(error instanceof ConfigError ? error.message : error)
      process.exitCode = 1
    },
  )
}
