import { createHash, randomBytes } from 'node:crypto'
import { createReadStream, createWriteStream, existsSync, mkdirSync, readdirSync, renameSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import { bucketOf, type Call, headerOf, quoted, reply } from './call.ts'
import { type ChecksumAlgorithm, checksumHeader, compositeChecksum, createChecksum } from './checksums.ts'
import { checkKey, checkWriteConditions, objectHeaders, retentionAsked, versionHeaders } from './put-object.ts'
import { receiveBody, receiveDocument, requestedAlgorithm } from './receive.ts'
import { invalidArgument, invalidRequest, malformedXml, S3Error } from './s3-error.ts'
import { type Bucket, type ObjectHeaders, type ObjectVersion, readJson, writeJson } from './store.ts'
import type { Retention } from './retention.ts'
import { childrenNamed, childText, element, parseXml, rootElement, type XmlNode } from './xml.ts'

interface Upload {
  readonly bucket: string
  readonly key: string
  readonly initiated: string
  readonly algorithm: ChecksumAlgorithm
  readonly type: 'FULL_OBJECT' | 'COMPOSITE'
  readonly headers: ObjectHeaders
  readonly retention?: Retention
}

interface Part {
  readonly number: number
  readonly size: number
  readonly etag: string
  readonly checksum: string
  readonly lastModified: string
}

const noSuchUpload = (id: string) =>
  new S3Error(
    'NoSuchUpload',
    404,
    'The specified multipart upload does not exist. The upload ID may be invalid, or the upload may have been aborted or completed.',
    { UploadId: id },
  )

/** Completed uploads that are still being put together, so that a second completion does not race the first. */
const completing = new Set<string>()

function openUpload(call: Call): { folder: string; upload: Upload; id: string } {
  const id = call.query.get('uploadId') ?? ''
  const folder = join(call.store.uploadsFolder, id)
  if (!/^[0-9a-f]{32}$/.test(id) || !existsSync(join(folder, 'upload.json'))) throw noSuchUpload(id)
  const upload = readJson<Upload>(join(folder, 'upload.json'))
  if (upload.bucket !== call.bucketName || upload.key !== call.key) throw noSuchUpload(id)
  return { folder, upload, id }
}

const partsIn = (folder: string): Part[] =>
  readdirSync(folder)
    .filter((name) => /^\d+\.json$/.test(name))
    .map((name) => readJson<Part>(join(folder, name)))
    .sort((a, b) => a.number - b.number)

export async function createUpload(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  checkKey(call.key)
  await receiveDocument(call.req, call.authenticated)
  const algorithm = requestedAlgorithm(headerOf(call, 'x-amz-checksum-algorithm')) ?? 'CRC64NVME'
  const type = headerOf(call, 'x-amz-checksum-type') ?? (algorithm === 'CRC64NVME' ? 'FULL_OBJECT' : 'COMPOSITE')
  if (type !== 'FULL_OBJECT' && type !== 'COMPOSITE')
    throw invalidRequest('Value for x-amz-checksum-type header is invalid.')
  if (type === 'FULL_OBJECT' && !algorithm.startsWith('CRC'))
    throw invalidRequest(
      `The FULL_OBJECT checksum type cannot be used with the ${algorithm.toLowerCase()} checksum algorithm.`,
    )
  if (type === 'COMPOSITE' && algorithm === 'CRC64NVME')
    throw invalidRequest('The COMPOSITE checksum type cannot be used with the crc64nvme checksum algorithm.')
  const { retention } = retentionAsked(call, bucket)
  const id = randomBytes(16).toString('hex')
  const folder = join(call.store.uploadsFolder, id)
  mkdirSync(folder, { recursive: true })
  writeJson(join(folder, 'upload.json'), {
    bucket: bucket.name,
    key: call.key,
    initiated: call.now.toISOString(),
    algorithm,
    type,
    headers: objectHeaders(call),
    ...(retention ? { retention } : {}),
  } satisfies Upload)
  reply(
    call,
    200,
    { 'x-amz-checksum-algorithm': algorithm, 'x-amz-checksum-type': type },
    rootElement('InitiateMultipartUploadResult', [
      element('Bucket', bucket.name),
      element('Key', call.key),
      element('UploadId', id),
    ]),
  )
}

export async function uploadPart(call: Call): Promise<void> {
  bucketOf(call)
  const { folder, upload } = openUpload(call)
  const number = Number(call.query.get('partNumber'))
  if (!Number.isInteger(number) || number < 1 || number > 10_000)
    throw invalidArgument(
      'Part number must be an integer between 1 and 10000, inclusive',
      'partNumber',
      call.query.get('partNumber'),
    )
  const received = await receiveBody(call.req, call.authenticated, call.store.temporaryPath(), upload.algorithm)
  if (received.algorithm !== upload.algorithm) {
    rmSync(received.path, { force: true })
    throw invalidRequest(
      `Checksum Type mismatch occurred, expected checksum Type: ${upload.algorithm.toLowerCase()}, actual checksum Type: ${received.algorithm.toLowerCase()}`,
    )
  }
  renameSync(received.path, join(folder, `${number}.data`))
  writeJson(join(folder, `${number}.json`), {
    number,
    size: received.size,
    etag: received.md5,
    checksum: received.checksum,
    lastModified: call.now.toISOString(),
  } satisfies Part)
  reply(call, 200, { etag: quoted(received.md5), [checksumHeader(received.algorithm)]: received.checksum })
}

export function listParts(call: Call): void {
  bucketOf(call)
  const { folder, id } = openUpload(call)
  reply(
    call,
    200,
    {},
    rootElement('ListPartsResult', [
      element('Bucket', call.bucketName),
      element('Key', call.key),
      element('UploadId', id),
      element('IsTruncated', 'false'),
      ...partsIn(folder).map((part) =>
        element('Part', [
          element('PartNumber', String(part.number)),
          element('LastModified', part.lastModified),
          element('ETag', quoted(part.etag)),
          element('Size', String(part.size)),
        ]),
      ),
    ]),
  )
}

export function abortUpload(call: Call): void {
  bucketOf(call)
  rmSync(openUpload(call).folder, { recursive: true, force: true })
  reply(call, 204)
}

/** Holds the client's list of parts against what was received. */
function chosenParts(
  listed: readonly XmlNode[],
  received: readonly Part[],
  upload: Upload,
  smallestPart: number,
): Part[] {
  const invalid = () =>
    new S3Error(
      'InvalidPart',
      400,
      "One or more of the specified parts could not be found. The part may not have been uploaded, or the specified entity tag may not match the part's entity tag.",
    )
  const member = `Checksum${upload.algorithm}`
  const numbers = listed.map((node) => Number(childText(node, 'PartNumber')))
  if (numbers.some((number, index) => index > 0 && number <= (numbers[index - 1] ?? 0)))
    throw new S3Error(
      'InvalidPartOrder',
      400,
      'The list of parts was not in ascending order. Parts must be ordered by part number.',
    )
  return listed.map((node, index) => {
    const number = Number(childText(node, 'PartNumber'))
    const part = received.find((candidate) => candidate.number === number)
    if (!part || childText(node, 'ETag')?.replaceAll('"', '') !== part.etag) throw invalid()
    const claimed = childText(node, member)
    if (claimed !== undefined && claimed !== part.checksum) throw invalid()
    if (claimed === undefined && upload.type === 'COMPOSITE')
      throw invalidRequest(
        `The upload was created using a ${upload.algorithm.toLowerCase()} checksum. The complete request must include the checksum for each part.`,
      )
    if (index < listed.length - 1 && part.size < smallestPart)
      throw new S3Error('EntityTooSmall', 400, 'Your proposed upload is smaller than the minimum allowed size', {
        ProposedSize: String(part.size),
        MinSizeAllowed: String(smallestPart),
        PartNumber: String(number),
      })
    return part
  })
}

/** Writes the parts behind one another; returns the checksum of all bytes. */
async function concatenate(
  folder: string,
  parts: readonly Part[],
  algorithm: ChecksumAlgorithm,
  path: string,
): Promise<string> {
  const whole = await createChecksum(algorithm)
  async function* bytes() {
    for (const part of parts)
      for await (const piece of createReadStream(join(folder, `${part.number}.data`))) {
        whole.update(piece as Uint8Array)
        yield piece as Uint8Array
      }
  }
  await pipeline(Readable.from(bytes()), createWriteStream(path))
  return whole.digest()
}

export async function completeUpload(call: Call): Promise<void> {
  const bucket = bucketOf(call)
  const { folder, upload, id } = openUpload(call)
  const document = parseXml((await receiveDocument(call.req, call.authenticated, true)).text)
  const listed = document?.name === 'CompleteMultipartUpload' ? childrenNamed(document, 'Part') : []
  if (listed.length === 0) throw malformedXml()
  const parts = chosenParts(listed, partsIn(folder), upload, call.smallestPart)
  const size = parts.reduce((sum, part) => sum + part.size, 0)
  const claimedSize = headerOf(call, 'x-amz-mp-object-size')
  if (claimedSize !== undefined && Number(claimedSize) !== size)
    throw invalidRequest('The provided x-amz-mp-object-size does not match the total size of the parts.')
  checkWriteConditions(call, bucket)
  if (completing.has(id))
    throw new S3Error(
      'OperationAborted',
      409,
      'A conflicting conditional operation is currently in progress against this resource. Please try again.',
    )
  completing.add(id)
  const path = call.store.temporaryPath()
  try {
    const version = await assemble(call, bucket, { folder, upload, parts, size, path })
    rmSync(folder, { recursive: true, force: true })
    const { checksum } = version
    reply(
      call,
      200,
      versionHeaders(bucket, version),
      rootElement('CompleteMultipartUploadResult', [
        element('Location', `/${bucket.name}/${call.key}`),
        element('Bucket', bucket.name),
        element('Key', call.key),
        element('ETag', quoted(version.etag)),
        ...(checksum
          ? [element(`Checksum${checksum.algorithm}`, checksum.value), element('ChecksumType', checksum.type)]
          : []),
      ]),
    )
  } finally {
    rmSync(path, { force: true })
    completing.delete(id)
  }
}

async function assemble(
  call: Call,
  bucket: Bucket,
  {
    folder,
    upload,
    parts,
    size,
    path,
  }: { folder: string; upload: Upload; parts: readonly Part[]; size: number; path: string },
): Promise<ObjectVersion> {
  const { algorithm, type } = upload
  const full = await concatenate(folder, parts, algorithm, path)
  const value =
    type === 'FULL_OBJECT'
      ? full
      : await compositeChecksum(
          algorithm,
          parts.map((part) => part.checksum),
        )
  const claimed = headerOf(call, checksumHeader(algorithm))
  if (claimed !== undefined && claimed.replace(/-\d+$/, '') !== value.replace(/-\d+$/, ''))
    throw new S3Error('BadDigest', 400, `The ${algorithm} you specified did not match the calculated checksum.`)
  const md5 = createHash('md5')
  for (const part of parts) md5.update(part.etag, 'hex')
  checkWriteConditions(call, bucket)
  return bucket.add(
    {
      key: call.key,
      lastModified: call.now.toISOString(),
      deleteMarker: false,
      size,
      etag: `${md5.digest('hex')}-${parts.length}`,
      checksum: { algorithm, value, type },
      headers: upload.headers,
      ...(upload.retention ? { retention: upload.retention } : {}),
    },
    path,
  )
}
