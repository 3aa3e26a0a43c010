import { resolve } from 'node:path'
import { DEVELOPMENT_CHAIN, type Network, QUICKNET } from '#shared/protocol/networks.ts'
import type { WitnessAddress } from '#shared/log/add-checkpoint.ts'
import type { Certificate } from '#shared/timestamp/certificate.ts'
import { DEVELOPMENT_AUTHORITY_PEM, isDevelopmentAuthority } from '#shared/timestamp/development-authority.ts'
import { ConfigError } from './config-error.ts'
import { type EncryptionKeySetting, keyFile, readText } from './keys.ts'
import { isLoopback, servicesNotLocal } from './local-services.ts'
import { optionalVariables, type VariableName, variables, whatToSet } from './variables.ts'

/** Everything that the environment decides; no other module reads it. */
export interface Config {
  readonly mode: 'production' | 'development' | 'test'
  /** Run by `npm start`: keys from the data folder, services faked on loopback. */
  readonly local: boolean
  /** The site is served by Vite from the sources. */
  readonly dev: boolean
  /** Demo accounts and draws may be made and used. */
  readonly demo: boolean
  /** Absolute path of the data folder. */
  readonly data: string
  readonly logLevel: string
  /** Address and port to listen on. */
  readonly host: string
  readonly port: number
  /** Scheme, host and port under which the public reaches the site. */
  readonly origin: string
  /** How many proxies in front may be believed about the visitor's address. */
  readonly trustedProxies: number
  readonly databaseUrl: string
  /** The first signs session cookies, all are accepted. */
  readonly sessionSecrets: readonly string[]
  /** The first encrypts, all decrypt. */
  readonly encryptionKeys: readonly EncryptionKeySetting[]
  readonly signingKeyPem: string
  readonly retiredSigningKeyPems: readonly string[]
  readonly objectStore: {
    readonly endpoint?: string
    readonly region: string
    readonly bucket: string
    readonly accessKeyId: string
    readonly secretAccessKey: string
    readonly forcePathStyle: boolean
    readonly lockDays: number
  }
  readonly mail: { readonly url: string; readonly from: string }
  readonly beacon: {
    readonly networkName: 'quicknet' | 'development'
    readonly network: Network
    readonly relays: readonly string[]
  }
  /** Timestamp authorities, in the order in which they are asked, and whom the site trusts. */
  readonly timestamps: {
    readonly urls: readonly string[]
    readonly trusted: readonly Certificate[]
    /** The development authority is trusted, whose key is public. */
    readonly development: boolean
  }
  /** Outside witnesses of the site's log. */
  readonly witnesses: readonly WitnessAddress[]
  /** Where local mails are read, null with a real mail server. */
  readonly mailPageUrl: string | null
  /** How long a job may run before another worker takes it over. */
  readonly jobExpirySeconds: number
  /** The point at which the worker kills itself (server/jobs/crash-points.ts): for tests on local fakes only. */
  readonly crashAt: string | null
}

type Environment = Readonly<Record<string, string | undefined>>

/** drand's public relays for quicknet, and Cloudflare's (drand's documentation, from memory). */
const publicRelays = [
  'https://api.drand.sh',
  'https://api2.drand.sh',
  'https://api3.drand.sh',
  'https://drand.cloudflare.com',
].join(',')

/** What the fakes are started with; server/fakes/main.ts has the same. */
export const localObjectStore = {
  accessKeyId: 'evenpenny-local',
  secretAccessKey: 'evenpenny-local-secret',
  bucket: 'evenpenny',
}

function defaults(env: Environment): Environment {
  const sitePort = env.EVENPENNY_PORT ?? '4780'
  const common: Environment = {
    NODE_ENV: 'production',
    EVENPENNY_LOCAL: 'no',
    EVENPENNY_DEV: 'no',
    EVENPENNY_DEMO: 'no',
    EVENPENNY_DATA: '.data',
    EVENPENNY_LOG_LEVEL: 'info',
    EVENPENNY_HOST: '0.0.0.0',
    EVENPENNY_PORT: '4780',
    EVENPENNY_TRUSTED_PROXIES: '0',
    EVENPENNY_S3_FORCE_PATH_STYLE: env.EVENPENNY_S3_ENDPOINT ? 'yes' : 'no',
    EVENPENNY_S3_LOCK_DAYS: '3650',
    EVENPENNY_BEACON_NETWORK: 'quicknet',
    EVENPENNY_BEACON_RELAYS: publicRelays,
    EVENPENNY_FAKE_MAIL_PAGE_PORT: '4784',
    EVENPENNY_JOB_EXPIRY_SECONDS: '300',
  }
  if (env.EVENPENNY_LOCAL !== 'yes') return common
  const data = env.EVENPENNY_DATA ?? '.data'
  return {
    ...common,
    EVENPENNY_DEMO: 'yes',
    EVENPENNY_HOST: '127.0.0.1',
    EVENPENNY_ORIGIN: `http://localhost:${sitePort}`,
    EVENPENNY_SESSION_SECRET: readText(keyFile(data, 'session-secret')),
    EVENPENNY_ENCRYPTION_KEYS: readText(keyFile(data, 'encryption-keys')),
    EVENPENNY_SIGNING_KEY: readText(keyFile(data, 'signing-key.pem')),
    EVENPENNY_S3_ENDPOINT: `http://127.0.0.1:${env.EVENPENNY_FAKE_S3_PORT ?? '4782'}`,
    EVENPENNY_S3_REGION: 'us-east-1',
    EVENPENNY_S3_BUCKET: localObjectStore.bucket,
    EVENPENNY_S3_ACCESS_KEY_ID: localObjectStore.accessKeyId,
    EVENPENNY_S3_SECRET_ACCESS_KEY: localObjectStore.secretAccessKey,
    EVENPENNY_S3_FORCE_PATH_STYLE: 'yes',
    EVENPENNY_SMTP_URL: `smtp://127.0.0.1:${env.EVENPENNY_FAKE_SMTP_PORT ?? '4783'}`,
    EVENPENNY_MAIL_FROM: 'Evenpenny <draws@evenpenny.example>',
    EVENPENNY_BEACON_NETWORK: 'development',
    EVENPENNY_BEACON_RELAYS: `http://127.0.0.1:${env.EVENPENNY_FAKE_BEACON_PORT ?? '4785'}`,
    EVENPENNY_TIMESTAMP_URLS: `http://127.0.0.1:${env.EVENPENNY_FAKE_TIMESTAMP_PORT ?? '4786'}`,
    EVENPENNY_TIMESTAMP_CERTIFICATES: DEVELOPMENT_AUTHORITY_PEM,
  }
}

/** Reads the settings out of an environment. Throws a ConfigError with every problem at once. */
export function readConfig(environment: Environment): Config {
  // An empty variable is as good as none.
  const env = Object.fromEntries(
    Object.entries(environment).filter(([, value]) => value !== undefined && value.trim() !== ''),
  )
  const values: Environment = { ...defaults(env), ...env }
  const names = Object.keys(variables.shape) as VariableName[]
  const missing = names.filter((name) => values[name] === undefined && !optionalVariables.has(name))
  const problems = missing.map((name) => missingProblem(name, env))
  const schema = variables.partial(Object.fromEntries(names.map((name) => [name, true])) as Record<VariableName, true>)
  const parsed = schema.safeParse(Object.fromEntries(names.map((name) => [name, values[name]?.trim()])))
  if (!parsed.success) problems.push(...parsed.error.issues.map((issue) => `${String(issue.path[0])} ${issue.message}`))
  if (problems.length > 0 || !parsed.success) throw new ConfigError(problems)
  const config = assemble(parsed.data as Whole)
  const unsafe = unsafeProblems(config)
  if (unsafe.length > 0) throw new ConfigError(unsafe)
  return config
}

function missingProblem(name: VariableName, env: Environment): string {
  const inKeys = ['EVENPENNY_SESSION_SECRET', 'EVENPENNY_ENCRYPTION_KEYS', 'EVENPENNY_SIGNING_KEY'].includes(name)
  if (env.EVENPENNY_LOCAL === 'yes' && inKeys)
    return `${name} is not set and ${env.EVENPENNY_DATA ?? '.data'}/keys holds no file for it. Run npm start, which makes the keys.`
  return `${name} is not set. ${whatToSet[name] ?? ''}`.trim()
}

type Parsed = ReturnType<typeof variables.parse>
type Optional = 'EVENPENNY_S3_ENDPOINT' | 'EVENPENNY_RETIRED_SIGNING_KEYS' | 'EVENPENNY_CRASH_AT'
type Whole = Omit<Parsed, Optional> & Partial<Pick<Parsed, Optional>>

function assemble(v: Whole): Config {
  return {
    mode: v.NODE_ENV,
    local: v.EVENPENNY_LOCAL,
    dev: v.EVENPENNY_DEV,
    demo: v.EVENPENNY_DEMO,
    data: resolve(v.EVENPENNY_DATA),
    logLevel: v.EVENPENNY_LOG_LEVEL,
    host: v.EVENPENNY_HOST,
    port: v.EVENPENNY_PORT,
    origin: v.EVENPENNY_ORIGIN,
    trustedProxies: v.EVENPENNY_TRUSTED_PROXIES,
    databaseUrl: v.EVENPENNY_DATABASE_URL.url,
    sessionSecrets: v.EVENPENNY_SESSION_SECRET.split(',').map((secret) => secret.trim()),
    encryptionKeys: v.EVENPENNY_ENCRYPTION_KEYS,
    signingKeyPem: v.EVENPENNY_SIGNING_KEY[0] ?? '',
    retiredSigningKeyPems: v.EVENPENNY_RETIRED_SIGNING_KEYS ?? [],
    objectStore: {
      ...(v.EVENPENNY_S3_ENDPOINT === undefined ? {} : { endpoint: v.EVENPENNY_S3_ENDPOINT }),
      region: v.EVENPENNY_S3_REGION,
      bucket: v.EVENPENNY_S3_BUCKET,
      accessKeyId: v.EVENPENNY_S3_ACCESS_KEY_ID,
      secretAccessKey: v.EVENPENNY_S3_SECRET_ACCESS_KEY,
      forcePathStyle: v.EVENPENNY_S3_FORCE_PATH_STYLE,
      lockDays: v.EVENPENNY_S3_LOCK_DAYS,
    },
    mail: { url: v.EVENPENNY_SMTP_URL, from: v.EVENPENNY_MAIL_FROM },
    beacon: {
      networkName: v.EVENPENNY_BEACON_NETWORK,
      network: v.EVENPENNY_BEACON_NETWORK === 'development' ? DEVELOPMENT_CHAIN : QUICKNET,
      relays: v.EVENPENNY_BEACON_RELAYS,
    },
    timestamps: {
      urls: v.EVENPENNY_TIMESTAMP_URLS,
      trusted: v.EVENPENNY_TIMESTAMP_CERTIFICATES,
      development: v.EVENPENNY_TIMESTAMP_CERTIFICATES.some(isDevelopmentAuthority),
    },
    witnesses: v.EVENPENNY_WITNESSES ?? [],
    jobExpirySeconds: v.EVENPENNY_JOB_EXPIRY_SECONDS,
    crashAt: v.EVENPENNY_CRASH_AT ?? null,
    mailPageUrl: v.EVENPENNY_LOCAL ? `http://127.0.0.1:${v.EVENPENNY_FAKE_MAIL_PAGE_PORT}` : null,
  }
}

/** What must not go together, however right each part is. */
function unsafeProblems(config: Config): string[] {
  const notLocal = servicesNotLocal({
    databaseUrl: config.databaseUrl,
    objectStoreEndpoint: config.objectStore.endpoint,
    smtpUrl: config.mail.url,
    beaconRelays: config.beacon.relays,
    timestampUrls: config.timestamps.urls,
    origin: config.origin,
  })
  const problems: string[] = []
  if (config.crashAt !== null && !(config.local && notLocal.length === 0)) {
    problems.push('EVENPENNY_CRASH_AT must not be set: it kills the worker, for tests on local fakes.')
  }
  if (notLocal.length > 0) {
    const why = `${notLocal.join(', ')} ${notLocal.length === 1 ? 'is' : 'are'} not on this machine's loopback address`
    if (config.demo) problems.push(`EVENPENNY_DEMO must be no: demo accounts have known passwords, and ${why}.`)
    if (config.beacon.networkName === 'development')
      problems.push(`EVENPENNY_BEACON_NETWORK must be quicknet: the development chain's secret is public, and ${why}.`)
    if (config.timestamps.development)
      problems.push(
        `EVENPENNY_TIMESTAMP_CERTIFICATES must not hold the development authority's: its key is public, and ${why}.`,
      )
    if (config.local)
      problems.push(`EVENPENNY_LOCAL must be no: keys from the data folder are for local fakes only, and ${why}.`)
  }
  if (config.origin.startsWith('http:') && !isLoopback(config.origin))
    problems.push('EVENPENNY_ORIGIN must begin with https: session cookies and private links travel over it.')
  const longEnough = config.sessionSecrets.every((secret) => secret.length >= 32)
  if (!longEnough)
    problems.push('EVENPENNY_SESSION_SECRET must have at least 32 characters, and so must an old one behind a comma.')
  return problems
}

/** The settings of this process. */
export const loadConfig = () => readConfig(process.env)
