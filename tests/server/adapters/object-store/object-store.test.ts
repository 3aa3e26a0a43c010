import { randomBytes } from 'node:crypto'
import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { Readable } from 'node:stream'
import { DeleteObjectCommand, HeadObjectCommand, PutObjectCommand, type S3Client } from '@aws-sdk/client-s3'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import {
  createObjectStore,
  ObjectConflictError,
  type ObjectStore,
  type ObjectStoreOptions,
} from '#server/adapters/object-store/object-store.ts'
import { digestOf, sourceOfBytes, sourceOfFile } from '#server/adapters/object-store/put-source.ts'
import { startS3Fake } from '#server/fakes/s3/server.ts'
import { clientFor, codeOf, credentials } from '#tests/server/fakes/s3/s3-client.ts'

const folder = mkdtempSync(join(tmpdir(), 'evenpenny-store-'))
let fake: Awaited<ReturnType<typeof startS3Fake>>
let client: S3Client
const stores: ObjectStore[] = []

function open(bucket: string, change: Partial<ObjectStoreOptions> = {}): ObjectStore {
  const store = createObjectStore({
    endpoint: fake.url,
    region: 'us-east-1',
    bucket,
    ...credentials,
    forcePathStyle: true,
    lockDays: 30,
    ...change,
  })
  stores.push(store)
  return store
}

beforeAll(async () => {
  fake = await startS3Fake({
    port: 0,
    folder: join(folder, 's3'),
    credentials,
    buckets: [
      { name: 'locked', objectLock: true },
      { name: 'plain', objectLock: false },
    ],
  })
  client = clientFor(fake.url)
})
afterAll(async () => {
  for (const store of stores) store.close()
  client.destroy()
  await fake.close()
  rmSync(folder, { recursive: true, force: true })
})

const text = async (store: ObjectStore, key: string) => {
  const got = await store.get(key)
  return got && Buffer.concat(await got.stream.toArray()).toString()
}

describe('put', () => {
  it('stores under a lock where the bucket has one, and says until when', async () => {
    const put = await open('locked').put('proof/a.zip', sourceOfBytes(Buffer.from('proof')), 'application/zip')
    expect(put).toMatchObject({ outcome: 'stored', size: 5, contentType: 'application/zip' })
    expect(Math.round(((put.lockedUntil?.getTime() ?? 0) - Date.now()) / 86_400_000)).toBe(30)
    const target = { Bucket: 'locked', Key: 'proof/a.zip', VersionId: put.versionId ?? '' }
    expect(await codeOf(client.send(new DeleteObjectCommand(target)))).toBe('AccessDenied')
    const head = await client.send(new HeadObjectCommand({ ...target, ChecksumMode: 'ENABLED' }))
    expect(head).toMatchObject({
      ObjectLockMode: 'COMPLIANCE',
      Metadata: { sha256: sourceOfBytes(Buffer.from('proof')).sha256 },
    })
    expect(head.ChecksumSHA256).toBe(Buffer.from(sourceOfBytes(Buffer.from('proof')).sha256, 'hex').toString('base64'))
  })

  it('stores without a lock where the bucket has none', async () => {
    const put = await open('plain').put('proof/a.zip', sourceOfBytes(Buffer.from('proof')), 'application/zip')
    expect(put).toMatchObject({ outcome: 'stored', lockedUntil: null, versionId: null })
  })

  it('finds an equal object and leaves a different one as it is', async () => {
    const store = open('locked')
    const source = sourceOfBytes(Buffer.from('the first'))
    const one = await store.put('once', source, 'text/plain')
    const two = await store.put('once', source, 'text/plain')
    expect([two.outcome, two.versionId]).toEqual(['there-already', one.versionId])
    await expect(store.put('once', sourceOfBytes(Buffer.from('the other')), 'text/plain')).rejects.toThrow(
      ObjectConflictError,
    )
    expect(await text(store, 'once')).toBe('the first')
  })

  it('lets one of two equal writers store and both succeed, one of two different ones fail', async () => {
    const [a, b] = [open('locked'), open('locked')]
    const same = sourceOfBytes(randomBytes(50_000))
    const both = await Promise.all([a.put('race/same', same, 'x/y'), b.put('race/same', same, 'x/y')])
    expect(both.map((put) => put.outcome).sort()).toEqual(['stored', 'there-already'])
    const different = await Promise.allSettled([
      a.put('race/different', sourceOfBytes(Buffer.from('a')), 'x/y'),
      b.put('race/different', sourceOfBytes(Buffer.from('b')), 'x/y'),
    ])
    expect(different.map((result) => result.status).sort()).toEqual(['fulfilled', 'rejected'])
    expect(different.find((result) => result.status === 'rejected')?.reason).toBeInstanceOf(ObjectConflictError)
  })

  it('streams a large file in parts, under the lock, and never a second time', async () => {
    const path = join(folder, 'large.zip')
    writeFileSync(path, randomBytes(11 * 1024 * 1024))
    const source = await sourceOfFile(path)
    const store = open('locked')
    const put = await store.put('large', source, 'application/zip')
    expect(put).toMatchObject({ outcome: 'stored', size: 11 * 1024 * 1024 })
    expect(put.lockedUntil).not.toBeNull()
    expect(await digestOf((await store.get('large'))?.stream ?? Readable.from([]))).toEqual({
      size: source.size,
      sha256: source.sha256,
    })
    expect((await store.put('large', source, 'application/zip')).outcome).toBe('there-already')
  })

  it.each([10, 7 * 1024 * 1024])(
    'stores nothing when the bytes turn out others than promised (%i bytes)',
    async (size) => {
      const store = open('plain')
      const promised = sourceOfBytes(randomBytes(size))
      const key = `broken-${size}`
      await expect(
        store.put(key, { ...promised, open: () => Readable.from([randomBytes(size)]) }, 'x/y'),
      ).rejects.toThrow('Nothing was stored')
      expect(await store.head(key)).toBeNull()
      expect(readdirSync(join(folder, 's3', 'uploads'))).toEqual([])
    },
  )

  it('does not take a refusal to tell of locks for a bucket without one', async () => {
    const wrong = open('locked', { secretAccessKey: 'wrong' })
    await expect(wrong.put('refused', sourceOfBytes(Buffer.from('x')), 'x/y')).rejects.toMatchObject({
      name: 'SignatureDoesNotMatch',
    })
  })
})

describe('reading', () => {
  it('gives null for what is not there', async () => {
    const store = open('plain')
    expect([await store.head('nothing'), await store.get('nothing')]).toEqual([null, null])
  })

  it('fails on bytes that were damaged where they lie', async () => {
    const store = open('plain')
    const source = sourceOfBytes(Buffer.from('heads heads tails'))
    await store.put('damaged', source, 'text/plain')
    const objects = join(folder, 's3', 'buckets', 'plain', 'objects')
    const file = readdirSync(objects, { recursive: true, encoding: 'utf8' }).filter((name) => name.endsWith('.data'))
    const { readFileSync } = await import('node:fs')
    for (const name of file)
      if (readFileSync(join(objects, name), 'utf8') === 'heads heads tails')
        writeFileSync(join(objects, name), 'heads tails tails')
    await expect(text(store, 'damaged')).rejects.toThrow(/checksum/i)
    await expect(store.put('damaged', source, 'text/plain')).rejects.toThrow()
  })

  it('lists more than a page', async () => {
    const store = open('plain')
    for (let start = 0; start < 1003; start += 59)
      await Promise.all(
        Array.from({ length: Math.min(59, 1003 - start) }, (_, index) =>
          client.send(
            new PutObjectCommand({ Bucket: 'plain', Key: `many/${String(start + index).padStart(4, '0')}`, Body: 'x' }),
          ),
        ),
      )
    const keys: string[] = []
    for await (const { key, size } of store.list('many/')) {
      keys.push(key)
      expect(size).toBe(1)
    }
    expect(keys).toEqual(Array.from({ length: 1003 }, (_, index) => `many/${String(index).padStart(4, '0')}`))
  })
})

describe('check', () => {
  it('tells whether the bucket answers and whether it can lock', async () => {
    expect(await open('locked').check()).toMatchObject({ ok: true, locks: true })
    expect(await open('plain').check()).toMatchObject({ ok: true, locks: false })
    expect(await open('nowhere').check()).toMatchObject({
      ok: false,
      locks: null,
      detail: expect.stringContaining('nowhere'),
    })
    expect(await open('locked', { endpoint: 'http://127.0.0.1:9' }).check()).toMatchObject({ ok: false })
  })
})
