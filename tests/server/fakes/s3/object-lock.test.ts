import {
  DeleteObjectCommand,
  DeleteObjectsCommand,
  GetObjectCommand,
  GetObjectLockConfigurationCommand,
  GetObjectRetentionCommand,
  HeadObjectCommand,
  ListObjectVersionsCommand,
  type ObjectLockMode,
  PutBucketVersioningCommand,
  PutObjectCommand,
  PutObjectLockConfigurationCommand,
  PutObjectRetentionCommand,
  type S3Client,
} from '@aws-sdk/client-s3'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { beforeSigning, clientFor, codeOf, startWithBuckets } from './s3-client.ts'

let fake: Awaited<ReturnType<typeof startWithBuckets>>
let client: S3Client

beforeAll(async () => {
  fake = await startWithBuckets()
  client = fake.client
})
afterAll(() => fake.close())

const inDays = (days: number) => new Date(Date.now() + days * 86_400_000)

async function lock(Key: string, ObjectLockMode: ObjectLockMode, days: number): Promise<string> {
  const stored = await client.send(
    new PutObjectCommand({
      Bucket: 'locked',
      Key,
      Body: 'kept',
      ObjectLockMode,
      ObjectLockRetainUntilDate: inDays(days),
    }),
  )
  return stored.VersionId ?? ''
}

const remove = (Key: string, VersionId: string, BypassGovernanceRetention = false) =>
  codeOf(client.send(new DeleteObjectCommand({ Bucket: 'locked', Key, VersionId, BypassGovernanceRetention })))

const extend = (
  Key: string,
  VersionId: string,
  Mode: ObjectLockMode,
  days: number,
  BypassGovernanceRetention = false,
) =>
  codeOf(
    client.send(
      new PutObjectRetentionCommand({
        Bucket: 'locked',
        Key,
        VersionId,
        Retention: { Mode, RetainUntilDate: inDays(days) },
        BypassGovernanceRetention,
      }),
    ),
  )

describe('an object under a lock', () => {
  it('cannot be deleted, alone or in a list, while its neighbour can', async () => {
    const id = await lock('kept', 'COMPLIANCE', 10)
    const free = await client.send(new PutObjectCommand({ Bucket: 'locked', Key: 'free', Body: 'x' }))
    expect(await remove('kept', id)).toBe('AccessDenied')
    expect(await remove('kept', id, true)).toBe('AccessDenied')
    const answer = await client.send(
      new DeleteObjectsCommand({
        Bucket: 'locked',
        Delete: {
          Objects: [
            { Key: 'kept', VersionId: id },
            { Key: 'free', VersionId: free.VersionId },
          ],
        },
      }),
    )
    expect(answer.Errors?.map((error) => [error.Key, error.Code])).toEqual([['kept', 'AccessDenied']])
    expect(answer.Deleted?.map((deleted) => deleted.Key)).toEqual(['free'])
    const got = await client.send(new GetObjectCommand({ Bucket: 'locked', Key: 'kept', VersionId: id }))
    expect(await got.Body?.transformToString()).toBe('kept')
    expect(got.ObjectLockMode).toBe('COMPLIANCE')
  })

  it('is hidden by a delete marker and by a new version, but not lost', async () => {
    const id = await lock('hidden', 'COMPLIANCE', 10)
    const marker = await client.send(new DeleteObjectCommand({ Bucket: 'locked', Key: 'hidden' }))
    expect(marker.DeleteMarker).toBe(true)
    expect(await codeOf(client.send(new GetObjectCommand({ Bucket: 'locked', Key: 'hidden' })))).toBe('NoSuchKey')
    await client.send(new PutObjectCommand({ Bucket: 'locked', Key: 'hidden', Body: 'newer' }))
    const old = await client.send(new GetObjectCommand({ Bucket: 'locked', Key: 'hidden', VersionId: id }))
    expect(await old.Body?.transformToString()).toBe('kept')
    expect(await remove('hidden', marker.VersionId ?? '')).toBe('accepted')
    const list = await client.send(new ListObjectVersionsCommand({ Bucket: 'locked', Prefix: 'hidden' }))
    expect([list.Versions?.length, list.DeleteMarkers?.length ?? 0]).toEqual([2, 0])
  })

  it('under COMPLIANCE can only be locked for longer', async () => {
    const id = await lock('compliance', 'COMPLIANCE', 10)
    expect(await extend('compliance', id, 'COMPLIANCE', 5)).toBe('AccessDenied')
    expect(await extend('compliance', id, 'COMPLIANCE', 5, true)).toBe('AccessDenied')
    expect(await extend('compliance', id, 'GOVERNANCE', 20, true)).toBe('AccessDenied')
    expect(await extend('compliance', id, 'COMPLIANCE', 20)).toBe('accepted')
    const held = await client.send(new GetObjectRetentionCommand({ Bucket: 'locked', Key: 'compliance' }))
    expect(Math.round(((held.Retention?.RetainUntilDate?.getTime() ?? 0) - Date.now()) / 86_400_000)).toBe(20)
    expect(await remove('compliance', id)).toBe('AccessDenied')
  })

  it('under GOVERNANCE gives way only to an explicit bypass', async () => {
    const id = await lock('governance', 'GOVERNANCE', 10)
    expect(await extend('governance', id, 'GOVERNANCE', 5)).toBe('AccessDenied')
    expect(await extend('governance', id, 'GOVERNANCE', 5, true)).toBe('accepted')
    expect(await remove('governance', id)).toBe('AccessDenied')
    expect(await remove('governance', id, true)).toBe('accepted')
  })

  it('can be deleted once its time is over', async () => {
    const id = await lock('over', 'COMPLIANCE', 1)
    expect(await remove('over', id)).toBe('AccessDenied')
    fake.clock.now = inDays(1.01)
    const later = clientFor(fake.url, { systemClockOffset: 1.01 * 86_400_000 })
    expect(await codeOf(later.send(new DeleteObjectCommand({ Bucket: 'locked', Key: 'over', VersionId: id })))).toBe(
      'accepted',
    )
    fake.clock.now = undefined
  })
})

describe('asking for a lock', () => {
  const put = (more: object) =>
    codeOf(client.send(new PutObjectCommand({ Bucket: 'locked', Key: 'asked', Body: 'x', ...more })))

  it('needs both headers, a time to come, a bucket with object lock and a checksum', async () => {
    expect(await put({ ObjectLockMode: 'COMPLIANCE' })).toBe('InvalidArgument')
    expect(await put({ ObjectLockRetainUntilDate: inDays(1) })).toBe('InvalidArgument')
    expect(await put({ ObjectLockMode: 'COMPLIANCE', ObjectLockRetainUntilDate: inDays(-1) })).toBe('InvalidArgument')
    const asked = { ObjectLockMode: 'COMPLIANCE', ObjectLockRetainUntilDate: inDays(1) } as const
    expect(await put({ ...asked, Bucket: 'plain' })).toBe('InvalidRequest')
    const bare = clientFor(fake.url, { requestChecksumCalculation: 'WHEN_REQUIRED' })
    beforeSigning(bare, ({ headers }) => {
      for (const name of Object.keys(headers))
        if (/^(content-md5|x-amz-(sdk-)?checksum)/.test(name)) delete headers[name]
    })
    expect(await codeOf(bare.send(new PutObjectCommand({ Bucket: 'locked', Key: 'asked', Body: 'x', ...asked })))).toBe(
      'InvalidRequest',
    )
    expect(await codeOf(client.send(new HeadObjectCommand({ Bucket: 'locked', Key: 'asked' })))).toBe('NotFound')
  })

  it('is answered by the bucket: whether it locks, and for how long by default', async () => {
    const configuration = (Bucket: string) => client.send(new GetObjectLockConfigurationCommand({ Bucket }))
    expect((await configuration('locked')).ObjectLockConfiguration).toEqual({ ObjectLockEnabled: 'Enabled' })
    expect(await codeOf(configuration('plain'))).toBe('ObjectLockConfigurationNotFoundError')
    await client.send(
      new PutObjectLockConfigurationCommand({
        Bucket: 'locked',
        ObjectLockConfiguration: {
          ObjectLockEnabled: 'Enabled',
          Rule: { DefaultRetention: { Mode: 'GOVERNANCE', Days: 3 } },
        },
      }),
    )
    expect((await configuration('locked')).ObjectLockConfiguration?.Rule?.DefaultRetention).toEqual({
      Mode: 'GOVERNANCE',
      Days: 3,
    })
    await client.send(new PutObjectCommand({ Bucket: 'locked', Key: 'default', Body: 'x' }))
    const held = await client.send(new HeadObjectCommand({ Bucket: 'locked', Key: 'default' }))
    expect(held.ObjectLockMode).toBe('GOVERNANCE')
    expect(Math.round(((held.ObjectLockRetainUntilDate?.getTime() ?? 0) - Date.now()) / 86_400_000)).toBe(3)
    await client.send(
      new PutObjectLockConfigurationCommand({
        Bucket: 'locked',
        ObjectLockConfiguration: { ObjectLockEnabled: 'Enabled' },
      }),
    )
  })

  it('keeps versions on in a bucket that locks', async () => {
    const suspend = (Bucket: string) =>
      codeOf(client.send(new PutBucketVersioningCommand({ Bucket, VersioningConfiguration: { Status: 'Suspended' } })))
    expect(await suspend('locked')).toBe('InvalidBucketState')
    expect(await suspend('plain')).toBe('accepted')
  })
})
