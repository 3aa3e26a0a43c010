import { createHash } from 'node:crypto'
import { createWriteStream, rmSync } from 'node:fs'
import type { IncomingMessage } from 'node:http'
import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import { type Authenticated, checkPayload, payloadMismatch } from './authenticate.ts'
import {
  algorithmOfHeader,
  type ChecksumAlgorithm,
  checksumAlgorithms,
  checksumHeader,
  checksumLength,
  createChecksum,
} from './checksums.ts'
import { decodeAwsChunked, incompleteBody } from './chunked.ts'
import { invalidRequest, S3Error } from './s3-error.ts'

/** A body that has passed every check and lies in a file of its own. */
export interface Received {
  readonly path: string
  readonly size: number
  /** Hex. */
  readonly md5: string
  readonly algorithm: ChecksumAlgorithm
  /** Base64. */
  readonly checksum: string
  /** The client sent a checksum of its own (a header, a trailer or Content-MD5). */
  readonly checked: boolean
}

const largestPut = 5 * 1024 ** 3

/**
 * Streams a request's body into a file while checking its length, its framing, its signatures, Content-MD5, the
 * payload's SHA-256 and the x-amz-checksum-… header or trailer. On any failure the file is gone and nothing is kept.
 * @param fallback the algorithm computed where the client names none (CRC64NVME, as S3 does).
 */
export async function receiveBody(
  req: IncomingMessage,
  authenticated: Authenticated,
  path: string,
  fallback: ChecksumAlgorithm = 'CRC64NVME',
): Promise<Received> {
  const wanted = wantedChecksum(req)
  const algorithm = wanted?.algorithm ?? fallback
  const contentMd5 = md5Header(req)
  const expectedLength = declaredLength(req, authenticated)
  const [md5, sha256, checksum] = [createHash('md5'), createHash('sha256'), await createChecksum(algorithm)]
  const trailers = new Map<string, string>()
  let size = 0
  async function* checked(source: AsyncIterable<Uint8Array>) {
    for await (const piece of source) {
      size += piece.length
      if (size > expectedLength) throw incompleteBody()
      md5.update(piece)
      sha256.update(piece)
      checksum.update(piece)
      yield piece
    }
  }
  try {
    await pipeline(Readable.from(checked(unframed(req, authenticated, trailers))), createWriteStream(path))
    if (size !== expectedLength) throw incompleteBody()
    const digest = sha256.digest('hex')
    if (/^[0-9a-f]{64}$/.test(authenticated.payload) && digest !== authenticated.payload)
      throw payloadMismatch(authenticated.payload, digest)
    const md5Digest = md5.digest()
    if (contentMd5 && !contentMd5.equals(md5Digest))
      throw new S3Error('BadDigest', 400, 'The Content-MD5 you specified did not match what we received.', {
        ExpectedDigest: contentMd5.toString('base64'),
        CalculatedDigest: md5Digest.toString('base64'),
      })
    const value = checksum.digest()
    if (wanted) {
      const claimed = wanted.value ?? trailers.get(checksumHeader(algorithm))
      if (claimed === undefined) throw invalidRequest(`The trailer ${checksumHeader(algorithm)} is missing.`)
      checkChecksumForm(algorithm, claimed)
      if (claimed !== value)
        throw new S3Error('BadDigest', 400, `The ${algorithm} you specified did not match the calculated checksum.`)
    }
    return {
      path,
      size,
      md5: md5Digest.toString('hex'),
      algorithm,
      checksum: value,
      checked: wanted !== undefined || contentMd5 !== undefined,
    }
  } catch (error) {
    rmSync(path, { force: true })
    throw error
  }
}

function unframed(req: IncomingMessage, authenticated: Authenticated, trailers: Map<string, string>) {
  switch (authenticated.payload) {
    case 'STREAMING-AWS4-HMAC-SHA256-PAYLOAD':
      return decodeAwsChunked(req, { signedBy: authenticated, trailer: false }, trailers)
    case 'STREAMING-AWS4-HMAC-SHA256-PAYLOAD-TRAILER':
      return decodeAwsChunked(req, { signedBy: authenticated, trailer: true }, trailers)
    case 'STREAMING-UNSIGNED-PAYLOAD-TRAILER':
      return decodeAwsChunked(req, { signedBy: undefined, trailer: true }, trailers)
    default:
      if (authenticated.payload !== 'UNSIGNED-PAYLOAD' && !/^[0-9a-f]{64}$/.test(authenticated.payload))
        throw new S3Error(
          'InvalidArgument',
          400,
          'x-amz-content-sha256 must be UNSIGNED-PAYLOAD, a STREAMING- scheme, or a valid sha256 value.',
        )
      return req as AsyncIterable<Uint8Array>
  }
}

function declaredLength(req: IncomingMessage, authenticated: Authenticated): number {
  const streaming = authenticated.payload.startsWith('STREAMING-')
  const text = req.headers[streaming ? 'x-amz-decoded-content-length' : 'content-length']
  if (typeof text !== 'string' || !/^\d{1,15}$/.test(text))
    throw new S3Error('MissingContentLength', 411, 'You must provide the Content-Length HTTP header.')
  const length = Number(text)
  if (length > largestPut)
    throw new S3Error('EntityTooLarge', 400, 'Your proposed upload exceeds the maximum allowed size')
  return length
}

function wantedChecksum(req: IncomingMessage): { algorithm: ChecksumAlgorithm; value: string | undefined } | undefined {
  const names = Object.keys(req.headers).filter((name) => algorithmOfHeader(name))
  const trailerNames = String(req.headers['x-amz-trailer'] ?? '')
    .split(',')
    .map((name) => name.trim())
    .filter((name) => name !== '')
  for (const name of trailerNames)
    if (!algorithmOfHeader(name))
      throw invalidRequest('The value specified in the x-amz-trailer header is not supported')
  const all = [...names, ...trailerNames]
  if (all.length > 1)
    throw invalidRequest('Expecting a single x-amz-checksum- header. Multiple checksum Types are not allowed.')
  const announced = req.headers['x-amz-sdk-checksum-algorithm']
  const name = all[0]
  if (!name) {
    if (announced)
      throw invalidRequest(
        'x-amz-sdk-checksum-algorithm specified, but no corresponding x-amz-checksum-* or x-amz-trailer headers were found.',
      )
    return undefined
  }
  const algorithm = algorithmOfHeader(name)
  if (!algorithm) return undefined
  if (typeof announced === 'string' && announced.toUpperCase() !== algorithm)
    throw invalidRequest('Value for x-amz-sdk-checksum-algorithm header is invalid.')
  if (trailerNames.length > 0) return { algorithm, value: undefined }
  const value = String(req.headers[name])
  checkChecksumForm(algorithm, value)
  return { algorithm, value }
}

function checkChecksumForm(algorithm: ChecksumAlgorithm, value: string): void {
  const bytes = Buffer.from(value, 'base64')
  if (bytes.length !== checksumLength[algorithm] || bytes.toString('base64') !== value)
    throw invalidRequest(`Value for ${checksumHeader(algorithm)} header is invalid.`)
}

function md5Header(req: IncomingMessage): Buffer | undefined {
  const value = req.headers['content-md5']
  if (typeof value !== 'string') return undefined
  const bytes = Buffer.from(value, 'base64')
  if (bytes.length !== 16) throw new S3Error('InvalidDigest', 400, 'The Content-MD5 you specified is not valid.')
  return bytes
}

/**
 * Reads a small document whole, with the same checks as a stored body.
 * @param headerIsOfObject an x-amz-checksum-… header speaks of the object to be made, not of this document.
 */
export async function receiveDocument(
  req: IncomingMessage,
  authenticated: Authenticated,
  headerIsOfObject = false,
): Promise<{ text: string; checked: boolean }> {
  const wanted = headerIsOfObject ? undefined : wantedChecksum(req)
  const contentMd5 = md5Header(req)
  const pieces: Uint8Array[] = []
  let size = 0
  const trailers = new Map<string, string>()
  for await (const piece of unframed(req, authenticated, trailers)) {
    size += piece.length
    if (size > 1024 * 1024) throw new S3Error('MaxMessageLengthExceeded', 400, 'Your request was too big.')
    pieces.push(piece)
  }
  const body = Buffer.concat(pieces)
  checkPayload(authenticated, body)
  if (contentMd5 && !createHash('md5').update(body).digest().equals(contentMd5))
    throw new S3Error('BadDigest', 400, 'The Content-MD5 you specified did not match what we received.')
  if (wanted) {
    const checksum = await createChecksum(wanted.algorithm)
    checksum.update(body)
    if (checksum.digest() !== (wanted.value ?? trailers.get(checksumHeader(wanted.algorithm))))
      throw new S3Error(
        'BadDigest',
        400,
        `The ${wanted.algorithm} you specified did not match the calculated checksum.`,
      )
  }
  return { text: body.toString('utf8'), checked: wanted !== undefined || contentMd5 !== undefined }
}

/** The algorithm that a multipart upload asks for. */
export function requestedAlgorithm(value: string | undefined): ChecksumAlgorithm | undefined {
  if (value === undefined) return undefined
  const algorithm = checksumAlgorithms.find((name) => name === value.toUpperCase())
  if (!algorithm) throw invalidRequest('Checksum algorithm provided is unsupported.')
  return algorithm
}
