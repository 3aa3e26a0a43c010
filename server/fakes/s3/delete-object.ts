import { bucketOf, type Call, headerOf, reply } from './call.ts'
import { receiveDocument } from './receive.ts'
import { checkDeletion } from './retention.ts'
import { invalidRequest, malformedXml, S3Error } from './s3-error.ts'
import { type Bucket, versionIsOf } from './store.ts'
import { childrenNamed, childText, element, parseXml, rootElement } from './xml.ts'

interface Deleted {
  readonly versionId?: string
  readonly deleteMarker?: string
}

/**
 * Without a version id a versioned bucket gets a delete marker and loses nothing; with one, that version is removed
 * for good unless its lock forbids it. Deleting what is not there succeeds.
 */
function deleteOne(bucket: Bucket, key: string, versionId: string | undefined, bypass: boolean, now: Date): Deleted {
  if (versionId === undefined && bucket.versioned) {
    const marker = bucket.add(
      {
        key,
        lastModified: now.toISOString(),
        deleteMarker: true,
        size: 0,
        etag: '',
        headers: { contentType: '', other: {}, metadata: {} },
      },
      undefined,
    )
    return { deleteMarker: marker.versionId }
  }
  const version = bucket.versionsOf(key).find(versionIsOf(versionId ?? 'null'))
  if (!version) return versionId === undefined ? {} : { versionId }
  checkDeletion(version.retention, bypass, now)
  bucket.remove(version)
  return {
    ...(versionId === undefined ? {} : { versionId }),
    ...(version.deleteMarker ? { deleteMarker: version.versionId } : {}),
  }
}

const bypassAsked = (call: Call) => headerOf(call, 'x-amz-bypass-governance-retention')?.toLowerCase() === 'true'

export function deleteObject(call: Call): void {
  const deleted = deleteOne(bucketOf(call), call.key, call.query.get('versionId'), bypassAsked(call), call.now)
  const shown = deleted.versionId ?? deleted.deleteMarker
  reply(call, 204, {
    ...(shown === undefined ? {} : { 'x-amz-version-id': shown }),
    ...(deleted.deleteMarker === undefined ? {} : { 'x-amz-delete-marker': 'true' }),
  })
}

export async function deleteObjects(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  const { text, checked } = await receiveDocument(call.req, call.authenticated)
  if (!checked) throw invalidRequest('Missing required header for this request: Content-MD5 OR x-amz-checksum-*')
  const document = parseXml(text)
  if (document?.name !== 'Delete') throw malformedXml()
  const objects = childrenNamed(document, 'Object')
  if (objects.length === 0 || objects.length > 1000) throw malformedXml()
  const quiet = childText(document, 'Quiet') === 'true'
  const results = objects.map((object) => {
    const key = childText(object, 'Key')
    if (!key) throw malformedXml()
    const versionId = childText(object, 'VersionId')
    const named = [element('Key', key), ...(versionId === undefined ? [] : [element('VersionId', versionId)])]
    try {
      const deleted = deleteOne(bucket, key, versionId, bypassAsked(call), call.now)
      if (quiet) return ''
      return element('Deleted', [
        ...named,
        ...(deleted.deleteMarker === undefined
          ? []
          : [element('DeleteMarker', 'true'), element('DeleteMarkerVersionId', deleted.deleteMarker)]),
      ])
    } catch (error) {
      if (!(error instanceof S3Error)) throw error
      return element('Error', [...named, element('Code', error.code), element('Message', error.message)])
    }
  })
  reply(call, 200, {}, rootElement('DeleteResult', results))
}
