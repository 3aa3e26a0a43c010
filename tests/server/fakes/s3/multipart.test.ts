import { mkdtempSync, readdirSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import {
  AbortMultipartUploadCommand,
  CompleteMultipartUploadCommand,
  CreateMultipartUploadCommand,
  GetObjectCommand,
  HeadObjectCommand,
  ListPartsCommand,
  PutObjectCommand,
  type S3Client,
  UploadPartCommand,
} from '@aws-sdk/client-s3'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startS3Fake } from '#server/fakes/s3/server.ts'
import { clientFor, codeOf, credentials } from './s3-client.ts'

const folder = mkdtempSync(join(tmpdir(), 'evenpenny-test-'))
const start = () =>
  startS3Fake({ port: 0, folder, credentials, smallestPart: 10, buckets: [{ name: 'parts', objectLock: true }] })
let fake: Awaited<ReturnType<typeof start>>
let client: S3Client

beforeAll(async () => {
  fake = await start()
  client = clientFor(fake.url)
})
afterAll(async () => {
  await fake.close()
  rmSync(folder, { recursive: true, force: true })
})

const begin = async (Key: string, more: object = {}) =>
  (await client.send(new CreateMultipartUploadCommand({ Bucket: 'parts', Key, ChecksumAlgorithm: 'CRC32', ...more })))
    .UploadId ?? ''

async function part(Key: string, UploadId: string, PartNumber: number, Body: string) {
  const sent = await client.send(
    new UploadPartCommand({ Bucket: 'parts', Key, UploadId, PartNumber, Body, ChecksumAlgorithm: 'CRC32' }),
  )
  return { PartNumber, ETag: sent.ETag, ChecksumCRC32: sent.ChecksumCRC32 }
}

const complete = (Key: string, UploadId: string, Parts: object[], more: object = {}) =>
  client.send(
    new CompleteMultipartUploadCommand({ Bucket: 'parts', Key, UploadId, MultipartUpload: { Parts }, ...more }),
  )

describe('multipart uploads', () => {
  it('join the listed parts in order and leave nothing behind', async () => {
    const id = await begin('whole')
    const [second, first] = [await part('whole', id, 2, 'tail'), await part('whole', id, 1, 'a long head ')]
    await part('whole', id, 7, 'never listed')
    expect(
      (await client.send(new ListPartsCommand({ Bucket: 'parts', Key: 'whole', UploadId: id }))).Parts,
    ).toHaveLength(3)
    const done = await complete('whole', id, [first, second])
    const got = await client.send(new GetObjectCommand({ Bucket: 'parts', Key: 'whole' }))
    expect(await got.Body?.transformToString()).toBe('a long head tail')
    expect(done.ETag).toMatch(/^"[0-9a-f]{32}-2"$/)
    expect(done.ChecksumCRC32).toMatch(/-2$/)
    expect(readdirSync(join(folder, 'uploads'))).toEqual([])
    expect(await codeOf(part('whole', id, 1, 'again'))).toBe('NoSuchUpload')
  })

  it('refuse a part with a wrong tag or checksum, another order, too small a part, the wrong size', async () => {
    const id = await begin('faulty')
    const [one, two] = [await part('faulty', id, 1, 'ten bytes.'), await part('faulty', id, 2, 'small')]
    const three = await part('faulty', id, 3, 'last')
    const attempt = (parts: object[], more: object = {}) => codeOf(complete('faulty', id, parts, more))
    expect(await attempt([{ ...one, ETag: '"00000000000000000000000000000000"' }, two])).toBe('InvalidPart')
    expect(await attempt([{ ...one, ChecksumCRC32: 'AAAAAA==' }, two])).toBe('InvalidPart')
    expect(await attempt([one, { ...two, PartNumber: 9 }])).toBe('InvalidPart')
    expect(await attempt([two, one])).toBe('InvalidPartOrder')
    expect(await attempt([one, two, three])).toBe('EntityTooSmall')
    expect(await attempt([one, two], { MpuObjectSize: 16 })).toBe('InvalidRequest')
    expect(await attempt([])).toBe('MalformedXML')
    expect(await codeOf(client.send(new HeadObjectCommand({ Bucket: 'parts', Key: 'faulty' })))).toBe('NotFound')
    expect(await attempt([one, two], { MpuObjectSize: 15 })).toBe('accepted')
  })

  it('check the checksum of the whole where the upload is of that type', async () => {
    const id = await begin('full', { ChecksumType: 'FULL_OBJECT' })
    const parts = [await part('full', id, 1, '123456789-'), await part('full', id, 2, 'abc')]
    // CRC-32 of "123456789-abc", by Python's zlib.crc32.
    const right = 'a/whUw=='
    expect(await codeOf(complete('full', id, parts, { ChecksumCRC32: 'AAAAAA==', ChecksumType: 'FULL_OBJECT' }))).toBe(
      'BadDigest',
    )
    expect(await codeOf(complete('full', id, parts, { ChecksumCRC32: right, ChecksumType: 'FULL_OBJECT' }))).toBe(
      'accepted',
    )
  })

  it('honour If-None-Match and the lock that the upload asked for', async () => {
    const until = new Date(Date.now() + 86_400_000)
    const id = await begin('locked', { ObjectLockMode: 'COMPLIANCE', ObjectLockRetainUntilDate: until })
    const only = await part('locked', id, 1, 'x')
    await client.send(new PutObjectCommand({ Bucket: 'parts', Key: 'locked', Body: 'first' }))
    expect(await codeOf(complete('locked', id, [only], { IfNoneMatch: '*' }))).toBe('PreconditionFailed')
    await complete('locked', id, [only])
    expect((await client.send(new HeadObjectCommand({ Bucket: 'parts', Key: 'locked' }))).ObjectLockMode).toBe(
      'COMPLIANCE',
    )
  })

  it('can be given up', async () => {
    const id = await begin('given-up')
    await part('given-up', id, 1, 'x')
    await client.send(new AbortMultipartUploadCommand({ Bucket: 'parts', Key: 'given-up', UploadId: id }))
    expect(await codeOf(complete('given-up', id, [{ PartNumber: 1, ETag: '"x"' }]))).toBe('NoSuchUpload')
    expect(readdirSync(join(folder, 'uploads'))).toEqual([])
  })
})

describe('a restart', () => {
  it('finds buckets, versions, locks and unfinished uploads as they were', async () => {
    const id = await begin('resumed')
    const one = await part('resumed', id, 1, 'sent before')
    await client.send(new PutObjectCommand({ Bucket: 'parts', Key: 'twice', Body: '1' }))
    const second = await client.send(new PutObjectCommand({ Bucket: 'parts', Key: 'twice', Body: '2' }))
    await fake.close()
    fake = await start()
    client = clientFor(fake.url)
    const got = await client.send(new GetObjectCommand({ Bucket: 'parts', Key: 'twice' }))
    expect([await got.Body?.transformToString(), got.VersionId]).toEqual(['2', second.VersionId])
    const third = await client.send(new PutObjectCommand({ Bucket: 'parts', Key: 'twice', Body: '3' }))
    expect((await client.send(new HeadObjectCommand({ Bucket: 'parts', Key: 'twice' }))).VersionId).toBe(
      third.VersionId,
    )
    expect((await client.send(new HeadObjectCommand({ Bucket: 'parts', Key: 'locked' }))).ObjectLockMode).toBe(
      'COMPLIANCE',
    )
    await complete('resumed', id, [one])
    const resumed = await client.send(new GetObjectCommand({ Bucket: 'parts', Key: 'resumed' }))
    expect(await resumed.Body?.transformToString()).toBe('sent before')
  })
})
