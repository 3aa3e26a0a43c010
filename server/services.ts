import type { Pool } from 'pg'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import type { Network } from '#shared/protocol/networks.ts'
import { type BeaconReader, createBeaconReader } from '#server/adapters/beacon/beacon-reader.ts'
import { type Clock, systemClock } from '#server/adapters/clock/clock.ts'
import { createKeyedHash, type KeyedHash } from '#server/adapters/encryption/keyed-hash.ts'
import { createSecretBox, type SecretBox } from '#server/adapters/encryption/secret-box.ts'
import { type Entropy, systemEntropy } from '#server/adapters/entropy/entropy.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { createMailer, type Mailer } from '#server/adapters/mail/mailer.ts'
import { createObjectStore, type ObjectStore } from '#server/adapters/object-store/object-store.ts'
import { createQueue, type Queue } from '#server/adapters/queue/queue.ts'
import { createSigningKeys, type SigningKeys } from '#server/adapters/signing/signing-keys.ts'
import {
  createDevelopmentTimestamper,
  createTimestamper,
  type Timestamper,
} from '#server/adapters/timestamp/timestamper.ts'
import type { WitnessAddress } from '#shared/log/add-checkpoint.ts'
import type { Config } from '#server/config/config.ts'
import { openStore, type RootDatabase } from '#server/store/database.ts'

/** What commands, queries and jobs know about the site itself. */
export interface Site {
  /** Scheme, host and port under which the public reaches the site. */
  readonly origin: string
  readonly network: Network
  readonly networkName: 'quicknet' | 'development'
  readonly bucket: string
  /** Outside witnesses of the site's log. */
  readonly witnesses: readonly WitnessAddress[]
  /** Seals on the development chain are made and accepted here. */
  readonly developmentChain: boolean
}

/** Everything that commands, queries and jobs use from outside. */
export interface Services {
  readonly db: RootDatabase
  readonly pool: Pool
  readonly clock: Clock
  readonly entropy: Entropy
  readonly queue: Queue
  readonly store: ObjectStore
  readonly mailer: Mailer
  readonly beacon: BeaconReader
  readonly timestamps: Timestamper
  readonly secrets: SecretBox
  /** Hashes of the codes on printed slips. */
  readonly slipCodes: KeyedHash
  readonly signing: SigningKeys
  readonly sha256: Sha256
  readonly site: Site
}

export interface OpenServices extends Services {
  close(): Promise<void>
}

export interface ServiceOptions {
  readonly name: string
  readonly connections?: number
  readonly jobExpirySeconds?: number
  /** Another clock than the system's is allowed for demo organisations only: the database sees to it. */
  readonly clock?: Clock
  /** Without it the configured authorities; with a clock of one's own the development authority, at its time. */
  readonly timestamps?: Timestamper
}

/** The services that a configuration names. Close them at the end of the process. */
export function createServices(config: Config, options: ServiceOptions): OpenServices {
  const clock = options.clock ?? systemClock
  const pretended = options.clock !== undefined && config.timestamps.development
  const { pool, db, close } = openStore(config.databaseUrl, {
    name: options.name,
    ...(options.connections ? { connections: options.connections } : {}),
  })
  const store = createObjectStore({ ...config.objectStore, clock: systemClock })
  const mailer = createMailer(config.mail)
  return {
    db,
    pool,
    clock,
    entropy: systemEntropy,
    queue: createQueue(pool, { expirySeconds: options.jobExpirySeconds ?? 300 }),
    store,
    mailer,
    beacon: createBeaconReader({ relays: config.beacon.relays }),
    timestamps:
      options.timestamps ??
      (pretended ? createDevelopmentTimestamper(clock) : createTimestamper({ ...config.timestamps, clock })),
    secrets: createSecretBox(config.encryptionKeys),
    slipCodes: createKeyedHash(config.encryptionKeys, 'slip code'),
    signing: createSigningKeys(config.signingKeyPem, config.retiredSigningKeyPems),
    sha256,
    site: {
      origin: config.origin,
      network: config.beacon.network,
      networkName: config.beacon.networkName,
      bucket: config.objectStore.bucket,
      witnesses: config.witnesses,
      developmentChain: config.beacon.networkName === 'development',
    },
    async close() {
      mailer.close()
      store.close()
      await close()
    },
  }
}
