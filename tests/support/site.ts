import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { type Clock, settableClock, type SettableClock } from '#server/adapters/clock/clock.ts'
import { readConfig, type Config } from '#server/config/config.ts'
import { type BeaconFake, startBeaconFake } from '#server/fakes/beacon/beacon-fake.ts'
import { type MailFake, startMailFake } from '#server/fakes/mail/mail-fake.ts'
import { startS3Fake } from '#server/fakes/s3/server.ts'
import { startTimestampFake, type TimestampFake } from '#server/fakes/timestamp/timestamp-fake.ts'
import { createTimestamper } from '#server/adapters/timestamp/timestamper.ts'
import { createServices, type OpenServices } from '#server/services.ts'
import { ensureKeys } from '#server/setup/lib/keys.mjs'
import { createTestDatabase, type TestDatabase } from './database.ts'

export interface TestSite {
  readonly database: TestDatabase
  readonly services: OpenServices
  readonly config: Config
  /** The environment that a process of the product needs to work on the same site. */
  readonly environment: Readonly<Record<string, string>>
  readonly beacon: BeaconFake
  readonly timestamp: TimestampFake
  readonly mail: MailFake
  readonly s3: { readonly url: string; readonly folder: string }
  close(): Promise<void>
}

/**
 * A site on a database of its own, with the local fakes in this process. `clock` moves the time of demo organisations and
 * of the fakes of beacon and timestamp authority; without it all have the machine's.
 */
export async function startTestSite(options: { readonly clock?: Clock } = {}): Promise<TestSite> {
  const data = mkdtempSync(join(tmpdir(), 'evenpenny-site-'))
  ensureKeys(data, null)
  const folder = join(data, 's3')
  const clock = options.clock
  const [database, beacon, timestamp, mail, s3] = await Promise.all([
    createTestDatabase(),
    startBeaconFake({ port: 0, control: true, ...(clock ? { now: () => clock.now() } : {}) }),
    startTimestampFake({ port: 0, control: true, ...(clock ? { now: () => clock.now() } : {}) }),
    startMailFake({ smtpPort: 0, pagePort: 0, folder: join(data, 'mail') }),
    startS3Fake({
      port: 0,
      folder,
      credentials: { accessKeyId: 'evenpenny-local', secretAccessKey: 'evenpenny-local-secret' },
      region: 'us-east-1',
      buckets: [{ name: 'evenpenny', objectLock: true }],
    }),
  ])
  const port = (url: string) => new URL(url).port
  const environment = {
    NODE_ENV: 'test',
    EVENPENNY_LOCAL: 'yes',
    EVENPENNY_DATA: data,
    EVENPENNY_DATABASE_URL: database.url,
    EVENPENNY_FAKE_S3_PORT: port(s3.url),
    EVENPENNY_FAKE_SMTP_PORT: port(mail.smtpUrl),
    EVENPENNY_FAKE_MAIL_PAGE_PORT: port(mail.url),
    EVENPENNY_FAKE_BEACON_PORT: port(beacon.url),
    EVENPENNY_FAKE_TIMESTAMP_PORT: port(timestamp.url),
  }
  const config = readConfig(environment)
  const services = createServices(config, {
    name: 'evenpenny test',
    ...(clock ? { clock, timestamps: createTimestamper({ ...config.timestamps, clock }) } : {}),
  })
  return {
    database,
    services,
    config,
    environment,
    beacon,
    timestamp,
    mail,
    s3: { url: s3.url, folder },
    async close() {
      await services.close()
      await Promise.all([beacon.close(), timestamp.close(), mail.close(), s3.close()])
      await database.drop()
      rmSync(data, { recursive: true, force: true })
    },
  }
}

export { settableClock, type SettableClock }
