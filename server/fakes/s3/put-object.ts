import { rmSync } from 'node:fs'
import { bucketOf, type Call, headerOf, quoted, reply } from './call.ts'
import { checksumHeader } from './checksums.ts'
import { receiveBody } from './receive.ts'
import { defaultRetentionFrom, parseRetention, type Retention } from './retention.ts'
import { invalidRequest, noSuchKey, notImplemented, preconditionFailed, S3Error } from './s3-error.ts'
import type { Bucket, ObjectHeaders, ObjectVersion } from './store.ts'

const kept = ['cache-control', 'content-disposition', 'content-encoding', 'content-language', 'expires'] as const

/** The headers to keep with an object; the transfer's own coding, aws-chunked, is no part of them. */
export function objectHeaders(call: Call): ObjectHeaders {
  const other: Record<string, string> = {}
  for (const name of kept) {
    const value = headerOf(call, name)
      ?.split(',')
      .map((part) => part.trim())
      .filter((part) => name !== 'content-encoding' || part !== 'aws-chunked')
      .join(', ')
    if (value) other[name] = value
  }
  const metadata: Record<string, string> = {}
  for (const name of Object.keys(call.req.headers))
    if (name.startsWith('x-amz-meta-')) metadata[name.slice('x-amz-meta-'.length)] = headerOf(call, name) ?? ''
  if (Object.entries(metadata).reduce((sum, [name, value]) => sum + name.length + Buffer.byteLength(value), 0) > 2048)
    throw new S3Error('MetadataTooLarge', 400, 'Your metadata headers exceed the maximum allowed metadata size')
  return { contentType: headerOf(call, 'content-type') ?? 'binary/octet-stream', other, metadata }
}

/** The lock that a new object gets: what its headers ask for, else the bucket's default. */
export function retentionAsked(call: Call, bucket: Bucket): { retention: Retention | undefined; explicit: boolean } {
  if (headerOf(call, 'x-amz-object-lock-legal-hold')) throw notImplemented('x-amz-object-lock-legal-hold')
  const asked = parseRetention(
    headerOf(call, 'x-amz-object-lock-mode'),
    headerOf(call, 'x-amz-object-lock-retain-until-date'),
    call.now,
  )
  if (asked && !bucket.settings.objectLock) throw invalidRequest('Bucket is missing Object Lock Configuration')
  return asked
    ? { retention: asked, explicit: true }
    : { retention: defaultRetentionFrom(bucket.settings.defaultRetention, call.now), explicit: false }
}

/** If-None-Match: * and If-Match of a write, against what stands there now. */
export function checkWriteConditions(call: Call, bucket: Bucket): void {
  const current = bucket.current(call.key)
  const noneMatch = headerOf(call, 'if-none-match')
  if (noneMatch !== undefined && noneMatch !== '*') throw notImplemented('If-None-Match with a value other than *')
  if (noneMatch === '*' && current) throw preconditionFailed('If-None-Match')
  const match = headerOf(call, 'if-match')
  if (match === undefined) return
  if (!current) throw noSuchKey(call.key)
  if (match !== '*' && match.replaceAll('"', '') !== current.etag) throw preconditionFailed('If-Match')
}

export function checkKey(key: string): void {
  if (Buffer.byteLength(key) > 1024) throw new S3Error('KeyTooLongError', 400, 'Your key is too long')
}

export function versionHeaders(bucket: Bucket, version: ObjectVersion): Record<string, string> {
  return bucket.versioned ? { 'x-amz-version-id': version.versionId } : {}
}

export async function putObject(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  checkKey(call.key)
  if (headerOf(call, 'x-amz-copy-source')) throw notImplemented('x-amz-copy-source')
  const headers = objectHeaders(call)
  const { retention, explicit } = retentionAsked(call, bucket)
  checkWriteConditions(call, bucket)
  const received = await receiveBody(call.req, call.authenticated, call.store.temporaryPath())
  try {
    if (explicit && !received.checked)
      throw invalidRequest(
        'Content-MD5 OR x-amz-checksum- HTTP header is required for Put Object requests with Object Lock parameters',
      )
    // Another writer may have come first while this body was on its way.
    checkWriteConditions(call, bucket)
  } catch (error) {
    rmSync(received.path, { force: true })
    throw error
  }
  const version = bucket.add(
    {
      key: call.key,
      lastModified: call.now.toISOString(),
      deleteMarker: false,
      size: received.size,
      etag: received.md5,
      checksum: { algorithm: received.algorithm, value: received.checksum, type: 'FULL_OBJECT' },
      headers,
      ...(retention ? { retention } : {}),
    },
    received.path,
  )
  reply(call, 200, {
    etag: quoted(version.etag),
    [checksumHeader(received.algorithm)]: received.checksum,
    'x-amz-checksum-type': 'FULL_OBJECT',
    ...versionHeaders(bucket, version),
  })
}
