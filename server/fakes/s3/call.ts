import type { IncomingMessage, ServerResponse } from 'node:http'
import type { Authenticated } from './authenticate.ts'
import { noSuchBucket } from './s3-error.ts'
import type { Bucket, Store } from './store.ts'

/** One authenticated request on its way through the fake. */
export interface Call {
  readonly req: IncomingMessage
  readonly res: ServerResponse
  readonly store: Store
  readonly bucketName: string
  readonly key: string
  readonly query: ReadonlyMap<string, string>
  readonly authenticated: Authenticated
  readonly now: Date
  /** Largest size below which a part that is not the last is refused, in bytes. */
  readonly smallestPart: number
}

export function headerOf(call: Call, name: string): string | undefined {
  const value = call.req.headers[name]
  return Array.isArray(value) ? value.join(',') : value
}

export function bucketOf(call: Call): Bucket {
  const bucket = call.store.bucket(call.bucketName)
  if (!bucket) throw noSuchBucket(call.bucketName)
  return bucket
}

export const quoted = (etag: string) => `"${etag}"`

export function reply(call: Call, status: number, headers: Readonly<Record<string, string>> = {}, xml?: string): void {
  const body = xml === undefined ? undefined : Buffer.from(xml)
  call.res.writeHead(status, {
    ...(body ? { 'content-type': 'application/xml', 'content-length': String(body.length) } : {}),
    ...(!body && status !== 204 && status !== 304 ? { 'content-length': '0' } : {}),
    ...headers,
  })
  call.res.end(body)
}
