import { bucketOf, type Call, headerOf, reply } from './call.ts'
import { versionOf } from './get-object.ts'
import { receiveDocument } from './receive.ts'
import { checkChange, parseRetention } from './retention.ts'
import { invalidRequest, malformedXml, S3Error } from './s3-error.ts'
import type { Bucket } from './store.ts'
import { childText, element, parseXml, rootElement } from './xml.ts'

function lockedBucket(call: Call): Bucket {
  const bucket = bucketOf(call)
  if (!bucket.settings.objectLock) throw invalidRequest('Bucket is missing Object Lock Configuration')
  return bucket
}

export function getRetention(call: Call): void {
  const { retention } = versionOf(call, lockedBucket(call))
  if (!retention)
    throw new S3Error(
      'NoSuchObjectLockConfiguration',
      404,
      'The specified object does not have a ObjectLock configuration',
    )
  reply(
    call,
    200,
    {},
    rootElement('Retention', [element('Mode', retention.mode), element('RetainUntilDate', retention.retainUntil)]),
  )
}

export async function putRetention(call: Call): Promise<void> {
  const bucket = lockedBucket(call)
  const { text, checked } = await receiveDocument(call.req, call.authenticated)
  if (!checked) throw invalidRequest('Missing required header for this request: Content-MD5 OR x-amz-checksum-*')
  const document = parseXml(text)
  if (document?.name !== 'Retention') throw malformedXml()
  const version = versionOf(call, bucket)
  const next = parseRetention(childText(document, 'Mode'), childText(document, 'RetainUntilDate'), call.now)
  const bypass = headerOf(call, 'x-amz-bypass-governance-retention')?.toLowerCase() === 'true'
  checkChange(version.retention, next, bypass, call.now)
  const { retention: _old, ...rest } = version
  bucket.replace({ ...rest, ...(next ? { retention: next } : {}) })
  reply(call, 200)
}
