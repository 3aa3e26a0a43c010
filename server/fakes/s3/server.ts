import { randomBytes } from 'node:crypto'
import { mkdtempSync, rmSync } from 'node:fs'
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { listenOnLoopback } from '../loopback.ts'
import { authenticate, type Credentials } from './authenticate.ts'
import * as buckets from './buckets.ts'
import type { Call } from './call.ts'
import { deleteObject, deleteObjects } from './delete-object.ts'
import { getObject } from './get-object.ts'
import * as multipart from './multipart.ts'
import { getRetention, putRetention } from './object-retention.ts'
import { putObject } from './put-object.ts'
import { errorDocument, notImplemented, S3Error } from './s3-error.ts'
import { splitUrl } from './sigv4.ts'
import { Store } from './store.ts'

export interface S3FakeOptions {
  /** 0 takes a free port. */
  readonly port: number
  /** Where objects are kept; without it in a temporary folder that goes with the fake. */
  readonly folder?: string
  readonly credentials: Credentials
  readonly region?: string
  readonly now?: () => Date
  /** Buckets to make if they are not there yet. */
  readonly buckets?: readonly { readonly name: string; readonly objectLock: boolean }[]
  /** Bytes; S3's own limit, 5 MiB, unless a test says otherwise. */
  readonly smallestPart?: number
}

export interface Fake {
  readonly url: string
  close(): Promise<void>
}

type Handler = (call: Call) => void | Promise<void>

/** Query parameters that pick an operation; anything like them that is not routed below is answered as not implemented. */
const subresources = new Set(
  'accelerate acl analytics attributes cors delete encryption intelligent-tiering inventory legal-hold lifecycle location logging metrics notification object-lock ownershipControls policy policyStatus publicAccessBlock replication requestPayment restore retention select tagging torrent uploads versioning versions website'.split(
    ' ',
  ),
)

const routes: Readonly<Record<string, Handler>> = {
  'GET service': buckets.listBuckets,
  'PUT bucket': buckets.createBucket,
  'HEAD bucket': buckets.headBucket,
  'DELETE bucket': buckets.deleteBucket,
  'GET bucket list-type': buckets.listObjects,
  'GET bucket versions': buckets.listVersions,
  'GET bucket location': buckets.getLocation,
  'GET bucket versioning': buckets.getVersioning,
  'PUT bucket versioning': buckets.putVersioning,
  'GET bucket object-lock': buckets.getObjectLock,
  'PUT bucket object-lock': buckets.putObjectLock,
  'POST bucket delete': deleteObjects,
  'PUT object': putObject,
  'GET object': getObject,
  'HEAD object': getObject,
  'DELETE object': deleteObject,
  'GET object retention': getRetention,
  'PUT object retention': putRetention,
  'POST object uploads': multipart.createUpload,
  'PUT object uploadId': multipart.uploadPart,
  'GET object uploadId': multipart.listParts,
  'POST object uploadId': multipart.completeUpload,
  'DELETE object uploadId': multipart.abortUpload,
}

function route(method: string, bucketName: string, key: string, query: ReadonlyMap<string, string>): Handler {
  const level = bucketName === '' ? 'service' : key === '' ? 'bucket' : 'object'
  const operation = [...query.keys()].find(
    (name) => subresources.has(name) || name === 'uploadId' || (name === 'list-type' && level === 'bucket'),
  )
  const name = [method, level, ...(operation ? [operation] : [])].join(' ')
  const handler = routes[name]
  if (!handler) throw notImplemented(name)
  return handler
}

/**
 * Starts an object store on loopback that speaks the S3 protocol: path-style addresses, Signature Version 4, checked
 * bodies, versions, object lock, multipart uploads. What it does not know it refuses with 501.
 */
export async function startS3Fake(options: S3FakeOptions): Promise<Fake> {
  const folder = options.folder ?? mkdtempSync(join(tmpdir(), 'evenpenny-s3-'))
  const store = new Store(folder)
  const now = options.now ?? (() => new Date())
  for (const { name, objectLock } of options.buckets ?? [])
    if (!store.bucket(name))
      store.create(name, { createdAt: now().toISOString(), versioning: objectLock ? 'Enabled' : 'None', objectLock })

  async function answer(req: IncomingMessage, res: ServerResponse): Promise<void> {
    const method = req.method ?? 'GET'
    const url = req.url ?? '/'
    const { path, query } = splitUrl(url)
    const slash = path.indexOf('/', 1)
    const bucketName = slash < 0 ? path.slice(1) : path.slice(1, slash)
    const key = slash < 0 ? '' : path.slice(slash + 1)
    const authenticated = authenticate(
      { method, url, headers: req.headers },
      options.credentials,
      options.region ?? 'us-east-1',
      now(),
    )
    const map = new Map(query)
    await route(
      method,
      bucketName,
      key,
      map,
    )({
      req,
      res,
      store,
      bucketName,
      key,
      query: map,
      authenticated,
      now: now(),
      smallestPart: options.smallestPart ?? 5 * 1024 ** 2,
    })
  }

  const server = createServer((req, res) => {
    const requestId = randomBytes(8).toString('hex').toUpperCase()
    res.setHeader('x-amz-request-id', requestId)
    answer(req, res).catch((error: unknown) => refuse(req, res, requestId, error))
  })
  const listening = await listenOnLoopback(server, options.port)
  return {
    url: listening.url,
    close: async () => {
      await listening.close()
      if (options.folder === undefined) rmSync(folder, { recursive: true, force: true })
    },
  }
}

function refuse(req: IncomingMessage, res: ServerResponse, requestId: string, error: unknown): void {
  // A client that went away while sending gets no answer, and nothing of what it sent was kept.
  if (req.destroyed && !req.complete) {
    res.destroy()
    return
  }
  if (res.headersSent) {
    res.destroy()
    return
  }
  const known =
    error instanceof S3Error
      ? error
      : error instanceof URIError
        ? new S3Error('InvalidURI', 400, "Couldn't parse the specified URI.")
        : new S3Error(
            'InternalError',
            500,
            error instanceof Error ? error.message : 'We encountered an internal error.',
          )
  const body = Buffer.from(errorDocument(known, (req.url ?? '').replace(/\?.*$/, ''), requestId))
  // The rest of the body is read and dropped, so that the client gets to read the answer.
  req.resume()
  res.writeHead(known.status, {
    'content-type': 'application/xml',
    'content-length': String(body.length),
    ...(req.complete ? {} : { connection: 'close' }),
  })
  res.end(req.method === 'HEAD' ? undefined : body)
}
