import { join, resolve } from 'node:path'
import { startBeaconFake } from './beacon/beacon-fake.ts'
import { startMailFake } from './mail/mail-fake.ts'
import { startS3Fake } from './s3/server.ts'
import { startTimestampFake } from './timestamp/timestamp-fake.ts'

/**
 * All fakes in one process, for `npm start` and browser tests. Ports: EVENPENNY_FAKE_S3_PORT, …_SMTP_PORT,
 * …_MAIL_PAGE_PORT, …_BEACON_PORT, …_TIMESTAMP_PORT; data in s3/ and mail/ below EVENPENNY_DATA.
 * EVENPENNY_FAKE_CONTROL=yes opens the test switch of the beacon and of the timestamp authority (POST /control).
 */
const { env } = process

function port(name: string, usual: number): number {
  const text = env[name] || String(usual)
  if (!/^\d{1,5}$/.test(text) || Number(text) > 65535) {
    console.error(`${name} must be a port from 1 to 65535 (0 takes a free one).`)
    process.exit(1)
  }
  return Number(text)
}

const data = resolve(env.EVENPENNY_DATA || '.data')
const started: { close(): Promise<void> }[] = []

async function start<T extends { close(): Promise<void> }>(
  name: string,
  variable: string,
  starting: Promise<T>,
): Promise<T> {
  try {
    const fake = await starting
    started.push(fake)
    return fake
  } catch (error) {
    const { code, message } = error as NodeJS.ErrnoException
    const taken =
      code === 'EADDRINUSE' ? `Its port is taken. Stop what uses it or set ${variable} to another port.` : message
    console.error(`The local ${name} cannot start. ${taken}`)
    await stop()
    process.exit(1)
  }
}

async function stop(): Promise<void> {
  await Promise.all(started.map((fake) => fake.close()))
}

const bucket = env.EVENPENNY_S3_BUCKET || 'evenpenny'
const s3 = await start(
  'object store',
  'EVENPENNY_FAKE_S3_PORT',
  startS3Fake({
    port: port('EVENPENNY_FAKE_S3_PORT', 4782),
    folder: join(data, 's3'),
    credentials: {
      accessKeyId: env.EVENPENNY_S3_ACCESS_KEY_ID || 'evenpenny-local',
      secretAccessKey: env.EVENPENNY_S3_SECRET_ACCESS_KEY || 'evenpenny-local-secret',
    },
    region: env.EVENPENNY_S3_REGION || 'us-east-1',
    buckets: [{ name: bucket, objectLock: true }],
  }),
)
const mail = await start(
  'mail server',
  'EVENPENNY_FAKE_SMTP_PORT or EVENPENNY_FAKE_MAIL_PAGE_PORT',
  startMailFake({
    smtpPort: port('EVENPENNY_FAKE_SMTP_PORT', 4783),
    pagePort: port('EVENPENNY_FAKE_MAIL_PAGE_PORT', 4784),
    folder: join(data, 'mail'),
  }),
)
const beacon = await start(
  'beacon',
  'EVENPENNY_FAKE_BEACON_PORT',
  startBeaconFake({ port: port('EVENPENNY_FAKE_BEACON_PORT', 4785), control: env.EVENPENNY_FAKE_CONTROL === 'yes' }),
)
const timestamp = await start(
  'timestamp authority',
  'EVENPENNY_FAKE_TIMESTAMP_PORT',
  startTimestampFake({
    port: port('EVENPENNY_FAKE_TIMESTAMP_PORT', 4786),
    control: env.EVENPENNY_FAKE_CONTROL === 'yes',
  }),
)

console.log(`object store ${s3.url} (bucket ${bucket})`)
console.log(`mail server ${mail.smtpUrl}, read at ${mail.url}`)
console.log(`beacon ${beacon.url}`)
console.log(`timestamp authority ${timestamp.url}`)
console.log('fakes ready')

for (const signal of ['SIGINT', 'SIGTERM'] as const)
  process.once(signal, () => {
    stop().then(() => process.exit(0))
  })
