import { bucketOf, type Call, headerOf, quoted, reply } from './call.ts'
import { byBytes, listKeys } from './listing.ts'
import { receiveDocument } from './receive.ts'
import { parseDefaultRetention } from './retention.ts'
import { invalidArgument, malformedXml, S3Error } from './s3-error.ts'
import { uriEncode } from './sigv4.ts'
import type { ObjectVersion } from './store.ts'
import { childText, element, parseXml, rootElement } from './xml.ts'

export function listBuckets(call: Call): void {
  const buckets = call.store
    .names()
    .map((name) =>
      element('Bucket', [
        element('Name', name),
        element('CreationDate', call.store.bucket(name)?.settings.createdAt ?? ''),
      ]),
    )
  reply(
    call,
    200,
    {},
    rootElement('ListAllMyBucketsResult', [element('Owner', [element('ID', 'local')]), element('Buckets', buckets)]),
  )
}

export async function createBucket(call: Call): Promise<void> {
  await receiveDocument(call.req, call.authenticated)
  if (!/^(?!\d+\.\d+\.\d+\.\d+$)[a-z0-9](?:[a-z0-9]|[.-](?=[a-z0-9])){1,61}[a-z0-9]$/.test(call.bucketName))
    throw new S3Error('InvalidBucketName', 400, 'The specified bucket is not valid.', { BucketName: call.bucketName })
  if (call.store.bucket(call.bucketName))
    throw new S3Error(
      'BucketAlreadyOwnedByYou',
      409,
      'Your previous request to create the named bucket succeeded and you already own it.',
    )
  const objectLock = headerOf(call, 'x-amz-bucket-object-lock-enabled')?.toLowerCase() === 'true'
  call.store.create(call.bucketName, {
    createdAt: call.now.toISOString(),
    versioning: objectLock ? 'Enabled' : 'None',
    objectLock,
  })
  reply(call, 200, { location: `/${call.bucketName}` })
}

export function deleteBucket(call: Call): void {
  if (bucketOf(call).keys().length > 0)
    throw new S3Error(
      'BucketNotEmpty',
      409,
      'The bucket you tried to delete is not empty. You must delete all versions in the bucket.',
    )
  call.store.delete(call.bucketName)
  reply(call, 204)
}

export function getVersioning(call: Call): void {
  const { versioning } = bucketOf(call).settings
  reply(
    call,
    200,
    {},
    rootElement('VersioningConfiguration', versioning === 'None' ? [] : [element('Status', versioning)]),
  )
}

export async function putVersioning(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  const document = parseXml((await receiveDocument(call.req, call.authenticated)).text)
  const status = document?.name === 'VersioningConfiguration' ? childText(document, 'Status') : undefined
  if (status !== 'Enabled' && status !== 'Suspended') throw malformedXml()
  if (bucket.settings.objectLock && status === 'Suspended')
    throw new S3Error(
      'InvalidBucketState',
      409,
      'An Object Lock configuration is present on this bucket, so the versioning state cannot be changed.',
    )
  bucket.changeSettings({ ...bucket.settings, versioning: status })
  reply(call, 200)
}

export function getObjectLock(call: Call): void {
  const { objectLock, defaultRetention } = bucketOf(call).settings
  if (!objectLock)
    throw new S3Error(
      'ObjectLockConfigurationNotFoundError',
      404,
      'Object Lock configuration does not exist for this bucket',
      {
        BucketName: call.bucketName,
      },
    )
  const rule = defaultRetention
    ? [
        element('Rule', [
          element('DefaultRetention', [
            element('Mode', defaultRetention.mode),
            defaultRetention.days === undefined
              ? element('Years', String(defaultRetention.years))
              : element('Days', String(defaultRetention.days)),
          ]),
        ]),
      ]
    : []
  reply(call, 200, {}, rootElement('ObjectLockConfiguration', [element('ObjectLockEnabled', 'Enabled'), ...rule]))
}

export async function putObjectLock(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  const document = parseXml((await receiveDocument(call.req, call.authenticated)).text)
  if (document?.name !== 'ObjectLockConfiguration' || childText(document, 'ObjectLockEnabled') !== 'Enabled')
    throw malformedXml()
  if (bucket.settings.versioning !== 'Enabled')
    throw new S3Error(
      'InvalidBucketState',
      409,
      "Versioning must be 'Enabled' on the bucket to apply a Object Lock configuration",
    )
  const rule = document.children
    .find((child) => child.name === 'Rule')
    ?.children.find((child) => child.name === 'DefaultRetention')
  const { defaultRetention: _old, ...rest } = bucket.settings
  bucket.changeSettings({
    ...rest,
    objectLock: true,
    ...(rule
      ? {
          defaultRetention: parseDefaultRetention(
            childText(rule, 'Mode'),
            childText(rule, 'Days'),
            childText(rule, 'Years'),
          ),
        }
      : {}),
  })
  reply(call, 200)
}

function maxKeys(call: Call): number {
  const text = call.query.get('max-keys') ?? '1000'
  const count = Number(text)
  if (!/^\d+$/.test(text) || count > 2147483647)
    throw invalidArgument('Argument maxKeys must be an integer between 0 and 2147483647', 'max-keys', text)
  return Math.min(count, 1000)
}

/** The fields of a listing that encoding-type=url covers. */
function encoder(call: Call): (name: string, value: string) => string {
  const type = call.query.get('encoding-type')
  if (type !== undefined && type !== 'url')
    throw invalidArgument('Invalid Encoding Method specified in Request', 'encoding-type', type)
  return (name, value) => element(name, type === 'url' ? uriEncode(value).replaceAll('%2F', '/') : value)
}

const entryXml = (version: ObjectVersion) => [
  element('LastModified', version.lastModified),
  element('ETag', quoted(version.etag)),
  ...(version.checksum
    ? [element('ChecksumAlgorithm', version.checksum.algorithm), element('ChecksumType', version.checksum.type)]
    : []),
  element('Size', String(version.size)),
  element('StorageClass', 'STANDARD'),
]

export function listObjects(call: Call): void {
  const bucket = bucketOf(call)
  const coded = encoder(call)
  const token = call.query.get('continuation-token')
  const decodedToken = token === undefined ? undefined : Buffer.from(token, 'base64url').toString('utf8')
  if (token !== undefined && (token === '' || Buffer.from(decodedToken ?? '').toString('base64url') !== token))
    throw invalidArgument('The continuation token provided is incorrect', 'continuation-token', token)
  const query = {
    prefix: call.query.get('prefix') ?? '',
    delimiter: call.query.get('delimiter') ?? '',
    after: decodedToken ?? call.query.get('start-after') ?? '',
    maxKeys: maxKeys(call),
  }
  const page = listKeys(
    bucket.keys().filter((key) => bucket.current(key)),
    query,
  )
  const contents = page.keys.flatMap((key) => {
    const version = bucket.current(key)
    return version ? [element('Contents', [coded('Key', key), ...entryXml(version)])] : []
  })
  reply(
    call,
    200,
    {},
    rootElement('ListBucketResult', [
      element('Name', bucket.name),
      coded('Prefix', query.prefix),
      ...(query.delimiter ? [coded('Delimiter', query.delimiter)] : []),
      element('MaxKeys', String(query.maxKeys)),
      ...(call.query.has('encoding-type') ? [element('EncodingType', 'url')] : []),
      element('KeyCount', String(page.keys.length + page.commonPrefixes.length)),
      ...(token === undefined ? [] : [element('ContinuationToken', token)]),
      ...(call.query.has('start-after') ? [coded('StartAfter', call.query.get('start-after') ?? '')] : []),
      element('IsTruncated', String(page.truncated)),
      ...(page.truncated ? [element('NextContinuationToken', Buffer.from(page.last).toString('base64url'))] : []),
      ...contents,
      ...page.commonPrefixes.map((prefix) => element('CommonPrefixes', [coded('Prefix', prefix)])),
    ]),
  )
}

/** Versions and delete markers, newest first within a key; a page never ends within a key's versions. */
export function listVersions(call: Call): void {
  const bucket = bucketOf(call)
  const coded = encoder(call)
  if (call.query.get('version-id-marker')) throw invalidArgument('Pages of this fake end between keys, not within one.')
  const query = {
    prefix: call.query.get('prefix') ?? '',
    delimiter: call.query.get('delimiter') ?? '',
    after: call.query.get('key-marker') ?? '',
    maxKeys: maxKeys(call),
  }
  const page = listKeys(bucket.keys().sort(byBytes), query)
  const entries = page.keys.flatMap((key) =>
    bucket
      .versionsOf(key)
      .map((version, index) =>
        element(version.deleteMarker ? 'DeleteMarker' : 'Version', [
          coded('Key', key),
          element('VersionId', version.versionId),
          element('IsLatest', String(index === 0)),
          ...(version.deleteMarker ? [element('LastModified', version.lastModified)] : entryXml(version)),
        ]),
      ),
  )
  reply(
    call,
    200,
    {},
    rootElement('ListVersionsResult', [
      element('Name', bucket.name),
      coded('Prefix', query.prefix),
      coded('KeyMarker', query.after),
      element('MaxKeys', String(query.maxKeys)),
      ...(call.query.has('encoding-type') ? [element('EncodingType', 'url')] : []),
      element('IsTruncated', String(page.truncated)),
      ...(page.truncated ? [coded('NextKeyMarker', page.last)] : []),
      ...entries,
      ...page.commonPrefixes.map((prefix) => element('CommonPrefixes', [coded('Prefix', prefix)])),
    ]),
  )
}

export function headBucket(call: Call): void {
  bucketOf(call)
  reply(call, 200, { 'x-amz-bucket-region': call.authenticated.scope.split('/')[1] ?? '' })
}

export function getLocation(call: Call): void {
  bucketOf(call)
  const region = call.authenticated.scope.split('/')[1] ?? ''
  reply(call, 200, {}, rootElement('LocationConstraint', [region === 'us-east-1' ? '' : region]))
}
