import { createReadStream } from 'node:fs'
import { pipeline } from 'node:stream/promises'
import { bucketOf, type Call, headerOf, quoted, reply } from './call.ts'
import { checksumHeader } from './checksums.ts'
import { versionHeaders } from './put-object.ts'
import { noSuchKey, notImplemented, preconditionFailed, S3Error } from './s3-error.ts'
import { type Bucket, type ObjectVersion, versionIsOf } from './store.ts'

/** The version that a request names, or the newest. Delete markers answer as S3 does: 404, by version id 405. */
export function versionOf(call: Call, bucket: Bucket): ObjectVersion {
  const versionId = call.query.get('versionId')
  const versions = bucket.versionsOf(call.key)
  const version = versionId === undefined ? versions[0] : versions.find(versionIsOf(versionId))
  if (!version) {
    if (versionId === undefined) throw noSuchKey(call.key)
    throw new S3Error('NoSuchVersion', 404, 'The specified version does not exist.', {
      Key: call.key,
      VersionId: versionId,
    })
  }
  if (version.deleteMarker) {
    call.res.setHeader('x-amz-delete-marker', 'true')
    call.res.setHeader('x-amz-version-id', version.versionId)
    if (versionId === undefined) throw noSuchKey(call.key)
    throw new S3Error('MethodNotAllowed', 405, 'The specified method is not allowed against this resource.')
  }
  return version
}

const matches = (list: string, etag: string) =>
  list.split(',').some((entry) => entry.trim() === '*' || entry.trim().replaceAll('"', '') === etag)

/** RFC 9110 section 13.2.2, without dates finer than a second. @returns true where the answer is 304. */
function checkReadConditions(call: Call, version: ObjectVersion): boolean {
  const modified = Math.floor(new Date(version.lastModified).getTime() / 1000) * 1000
  const time = (name: string) => {
    const value = headerOf(call, name)
    return value === undefined ? undefined : new Date(value).getTime()
  }
  const match = headerOf(call, 'if-match')
  const unmodifiedSince = time('if-unmodified-since')
  if (match !== undefined) {
    if (!matches(match, version.etag)) throw preconditionFailed('If-Match')
  } else if (unmodifiedSince !== undefined && modified > unmodifiedSince)
    throw preconditionFailed('If-Unmodified-Since')
  const noneMatch = headerOf(call, 'if-none-match')
  const modifiedSince = time('if-modified-since')
  if (noneMatch !== undefined) return matches(noneMatch, version.etag)
  return modifiedSince !== undefined && modified <= modifiedSince
}

interface Range {
  readonly first: number
  readonly last: number
}

/** One byte range (RFC 9110 section 14.1.2); undefined where the header is absent or asks for what S3 ignores. */
export function parseRange(header: string | undefined, size: number): Range | undefined {
  const parts = /^bytes=(\d*)-(\d*)$/.exec(header?.trim() ?? '')
  if (!parts || (parts[1] === '' && parts[2] === '')) return undefined
  const [, from = '', to = ''] = parts
  const first = from === '' ? Math.max(0, size - Number(to)) : Number(from)
  const last = from === '' || to === '' ? size - 1 : Math.min(Number(to), size - 1)
  if (from !== '' && to !== '' && Number(to) < Number(from)) return undefined
  if (first >= size || (from === '' && Number(to) === 0))
    throw new S3Error('InvalidRange', 416, 'The requested range is not satisfiable', {
      RangeRequested: header ?? '',
      ActualObjectSize: String(size),
    })
  return { first, last }
}

const overrides: Readonly<Record<string, string>> = {
  'response-content-type': 'content-type',
  'response-content-language': 'content-language',
  'response-expires': 'expires',
  'response-cache-control': 'cache-control',
  'response-content-disposition': 'content-disposition',
  'response-content-encoding': 'content-encoding',
}

function describe(call: Call, bucket: Bucket, version: ObjectVersion, whole: boolean): Record<string, string> {
  const headers: Record<string, string> = {
    'accept-ranges': 'bytes',
    'last-modified': new Date(version.lastModified).toUTCString(),
    etag: quoted(version.etag),
    'content-type': version.headers.contentType,
    ...version.headers.other,
    ...versionHeaders(bucket, version),
  }
  for (const [name, value] of Object.entries(version.headers.metadata)) headers[`x-amz-meta-${name}`] = value
  if (version.retention) {
    headers['x-amz-object-lock-mode'] = version.retention.mode
    headers['x-amz-object-lock-retain-until-date'] = version.retention.retainUntil
  }
  // A checksum covers the whole object, so a range is sent without it.
  if (whole && version.checksum && headerOf(call, 'x-amz-checksum-mode')?.toUpperCase() === 'ENABLED') {
    headers[checksumHeader(version.checksum.algorithm)] = version.checksum.value
    headers['x-amz-checksum-type'] = version.checksum.type
  }
  for (const [name, header] of Object.entries(overrides)) {
    const value = call.query.get(name)
    if (value !== undefined) headers[header] = value
  }
  return headers
}

/** GetObject and HeadObject. */
export async function getObject(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  if (call.query.has('partNumber')) throw notImplemented('partNumber')
  const version = versionOf(call, bucket)
  if (checkReadConditions(call, version)) {
    reply(call, 304, { etag: quoted(version.etag) })
    return
  }
  const range = parseRange(headerOf(call, 'range'), version.size)
  const length = range ? range.last - range.first + 1 : version.size
  call.res.writeHead(range ? 206 : 200, {
    ...describe(call, bucket, version, !range),
    'content-length': String(length),
    ...(range ? { 'content-range': `bytes ${range.first}-${range.last}/${version.size}` } : {}),
  })
  if (call.req.method === 'HEAD' || length === 0) {
    call.res.end()
    return
  }
  const source = createReadStream(bucket.dataPath(version), range ? { start: range.first, end: range.last } : {})
  await pipeline(source, call.res)
}
