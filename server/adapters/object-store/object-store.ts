import { createHash } from 'node:crypto'
import { Readable } from 'node:stream'
import {
  GetObjectCommand,
  GetObjectLockConfigurationCommand,
  HeadBucketCommand,
  HeadObjectCommand,
  paginateListObjectsV2,
  S3Client,
  S3ServiceException,
} from '@aws-sdk/client-s3'
import { Upload } from '@aws-sdk/lib-storage'
import { type Clock, systemClock } from '../clock/clock.ts'
import { type Health, reasonOf } from '../health.ts'
import { digestOf, type PutSource } from './put-source.ts'

export interface ObjectStoreOptions {
  /** Address of an S3-compatible service; without it Amazon's of the region. */
  readonly endpoint?: string
  readonly region: string
  readonly bucket: string
  readonly accessKeyId: string
  readonly secretAccessKey: string
  /** Buckets stand in the path, not in the host name: most services of one's own want it. */
  readonly forcePathStyle: boolean
  /** How long a stored object is kept from deletion, where the bucket can lock, in days. */
  readonly lockDays: number
  /** COMPLIANCE: nobody can lift the lock. */
  readonly lockMode?: 'COMPLIANCE' | 'GOVERNANCE'
  readonly clock?: Clock
}

/** An object of this name is there already and holds something else. Nothing was written. */
export class ObjectConflictError extends Error {
  constructor(readonly key: string) {
    super(`The object store already holds something else under ${key}; it was left as it is.`)
    this.name = 'ObjectConflictError'
  }
}

/** What was read back is not what was stored. */
export class ObjectDamagedError extends Error {
  constructor(readonly key: string) {
    super(`What the object store gives back for ${key} is not what was stored.`)
    this.name = 'ObjectDamagedError'
  }
}

export interface StoredObject {
  readonly size: number
  readonly versionId: string | null
  /** Until when it cannot be deleted; null where the bucket does not lock. */
  readonly lockedUntil: Date | null
  readonly contentType: string
}

export interface PutResult extends StoredObject {
  /** `there-already`: an equal object was found, as after a crash between storing and noting it. */
  readonly outcome: 'stored' | 'there-already'
}

export interface StoreHealth extends Health {
  /** Whether the bucket can lock; null if it could not be asked. */
  readonly locks: boolean | null
}

export interface ObjectStore {
  /**
   * Streams an object into the store with a SHA-256 checksum, under a lock where the bucket has one, and reads it back
   * and compares. Never overwrites: throws an ObjectConflictError for a different object of that name. Throws an
   * ObjectDamagedError, an S3ServiceException or a network error.
   */
  put(key: string, source: PutSource, contentType: string): Promise<PutResult>
  /** null if there is no such object. */
  head(key: string): Promise<StoredObject | null>
  /** The content as a stream, which fails if its checksum is wrong; null if there is no such object. */
  get(key: string): Promise<{ readonly object: StoredObject; readonly stream: Readable } | null>
  list(prefix: string): AsyncGenerator<{ readonly key: string; readonly size: number; readonly lastModified: Date }>
  check(): Promise<StoreHealth>
  close(): void
}

const dayMs = 86_400_000

const hasCode = (error: unknown, ...codes: readonly string[]) =>
  error instanceof S3ServiceException &&
  (codes.includes(error.name) || codes.includes(String(error.$metadata.httpStatusCode)))

export function createObjectStore(options: ObjectStoreOptions): ObjectStore {
  const { bucket: Bucket } = options
  const clock = options.clock ?? systemClock
  const client = new S3Client({
    region: options.region,
    forcePathStyle: options.forcePathStyle,
    credentials: { accessKeyId: options.accessKeyId, secretAccessKey: options.secretAccessKey },
    requestHandler: { connectionTimeout: 5_000, requestTimeout: 60_000 },
    ...(options.endpoint === undefined ? {} : { endpoint: options.endpoint }),
  })

  async function bucketLocks(): Promise<boolean> {
    try {
      const { ObjectLockConfiguration } = await client.send(new GetObjectLockConfigurationCommand({ Bucket }))
      return ObjectLockConfiguration?.ObjectLockEnabled === 'Enabled'
    } catch (error) {
      // Services without object lock answer that there is no such thing. A refusal is an error: it must not pass for "no lock".
      if (hasCode(error, 'ObjectLockConfigurationNotFoundError', 'NotImplemented', '501')) return false
      throw error
    }
  }

  async function head(key: string): Promise<StoredObject | null> {
    try {
      const answer = await client.send(new HeadObjectCommand({ Bucket, Key: key }))
      return describe(answer)
    } catch (error) {
      if (hasCode(error, 'NotFound', 'NoSuchKey')) return null
      throw error
    }
  }

  async function get(key: string) {
    try {
      const answer = await client.send(new GetObjectCommand({ Bucket, Key: key, ChecksumMode: 'ENABLED' }))
      return { object: describe(answer), stream: answer.Body as Readable }
    } catch (error) {
      if (hasCode(error, 'NoSuchKey', 'NotFound')) return null
      throw error
    }
  }

  /** Whether the store holds exactly these bytes under this key; null if it holds nothing. */
  async function holds(key: string, source: PutSource): Promise<StoredObject | false | null> {
    const there = await get(key)
    if (!there) return null
    const digest = await digestOf(there.stream)
    return digest.size === source.size && digest.sha256 === source.sha256 ? there.object : false
  }

  async function upload(key: string, source: PutSource, contentType: string): Promise<void> {
    const lock = (await bucketLocks())
      ? {
          ObjectLockMode: options.lockMode ?? 'COMPLIANCE',
          ObjectLockRetainUntilDate: new Date(clock.now().getTime() + options.lockDays * dayMs),
        }
      : {}
    const transfer = new Upload({
      client,
      params: {
        Bucket,
        Key: key,
        Body: Readable.from(checked(source)),
        ContentType: contentType,
        Metadata: { sha256: source.sha256 },
        ChecksumAlgorithm: 'SHA256',
        IfNoneMatch: '*',
        ...lock,
      },
      queueSize: 2,
    })
    await transfer.done()
  }

  return {
    async put(key, source, contentType) {
      let outcome: PutResult['outcome'] = 'stored'
      const before = await holds(key, source)
      if (before === false) throw new ObjectConflictError(key)
      if (before) return { outcome: 'there-already', ...before }
      try {
        await upload(key, source, contentType)
      } catch (error) {
        // Somebody else was first, or an answer was lost and the client tried again. The comparison below decides.
        if (!hasCode(error, 'PreconditionFailed', 'ConditionalRequestConflict', '412', '409')) throw error
        outcome = 'there-already'
      }
      const after = await holds(key, source)
      if (after) return { outcome, ...after }
      throw outcome === 'stored' ? new ObjectDamagedError(key) : new ObjectConflictError(key)
    },
    head,
    get,
    async *list(prefix) {
      for await (const page of paginateListObjectsV2({ client }, { Bucket, Prefix: prefix }))
        for (const { Key, Size, LastModified } of page.Contents ?? [])
          if (Key !== undefined) yield { key: Key, size: Size ?? 0, lastModified: LastModified ?? new Date(0) }
    },
    async check() {
      const start = performance.now()
      const milliseconds = () => Math.round(performance.now() - start)
      try {
        await client.send(new HeadBucketCommand({ Bucket }))
        const locks = await bucketLocks()
        const detail = locks ? 'The bucket answers and can lock.' : 'The bucket answers. It cannot lock what is stored.'
        return { ok: true, milliseconds: milliseconds(), locks, detail }
      } catch (error) {
        const detail = `The bucket ${Bucket} does not answer: ${reasonOf(error)}`
        return { ok: false, milliseconds: milliseconds(), locks: null, detail }
      }
    },
    close: () => client.destroy(),
  }
}

function describe(answer: {
  ContentLength?: number | undefined
  VersionId?: string | undefined
  ObjectLockRetainUntilDate?: Date | undefined
  ContentType?: string | undefined
}): StoredObject {
  return {
    size: answer.ContentLength ?? 0,
    versionId: answer.VersionId ?? null,
    lockedUntil: answer.ObjectLockRetainUntilDate ?? null,
    contentType: answer.ContentType ?? 'application/octet-stream',
  }
}

/** Passes the bytes on and fails at their end if they are not what the source promised: then nothing is stored. */
async function* checked(source: PutSource): AsyncGenerator<Uint8Array> {
  const hash = createHash('sha256')
  let size = 0
  for await (const piece of source.open()) {
    hash.update(piece)
    size += piece.length
    yield piece
  }
  if (size !== source.size || hash.digest('hex') !== source.sha256)
    throw new Error('The bytes to store changed while they were read. Nothing was stored.')
}
