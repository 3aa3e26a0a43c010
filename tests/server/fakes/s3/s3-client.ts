import { request } from 'node:http'
import { S3Client, type S3ClientConfig } from '@aws-sdk/client-s3'
import { startS3Fake } from '#server/fakes/s3/server.ts'

export const credentials = { accessKeyId: 'test-key', secretAccessKey: 'test-secret' }

export const clientFor = (url: string, change: Partial<S3ClientConfig> = {}) =>
  new S3Client({
    endpoint: url,
    region: 'us-east-1',
    forcePathStyle: true,
    credentials,
    maxAttempts: 1,
    ...change,
  })

/** A fake with a locking bucket `locked` and an ordinary bucket `plain`, whose clock a test can set. */
export async function startWithBuckets() {
  const clock = { now: undefined as Date | undefined }
  const fake = await startS3Fake({
    port: 0,
    credentials,
    now: () => clock.now ?? new Date(),
    buckets: [
      { name: 'locked', objectLock: true },
      { name: 'plain', objectLock: false },
    ],
  })
  const client = clientFor(fake.url)
  return {
    url: fake.url,
    client,
    clock,
    close: async () => {
      client.destroy()
      await fake.close()
    },
  }
}

/** The code of the S3 error that an operation ends with, or 'accepted'. */
export async function codeOf(operation: Promise<unknown>): Promise<string> {
  try {
    await operation
    return 'accepted'
  } catch (error) {
    const { name, Code } = error as { name: string; Code?: string }
    return Code ?? name
  }
}

/** Lets the client sign a request, then changes it on its way out: what a broken or hostile network does. */
export function tampering(
  client: S3Client,
  change: (outgoing: { headers: Record<string, string>; body?: unknown }) => void,
): S3Client {
  client.middlewareStack.add(
    (next) => (args) => {
      change(args.request as { headers: Record<string, string>; body?: unknown })
      return next(args)
    },
    { step: 'finalizeRequest', priority: 'low', name: 'tampering' },
  )
  return client
}

/** Changes a request before it is signed, after everything else has been added to it. */
export function beforeSigning(client: S3Client, change: (outgoing: { headers: Record<string, string> }) => void): void {
  const middleware = (next: (args: { request: unknown }) => unknown) => (args: { request: unknown }) => {
    change(args.request as { headers: Record<string, string> })
    return next(args)
  }
  client.middlewareStack.addRelativeTo(middleware as never, {
    relation: 'before',
    toMiddleware: 'httpSigningMiddleware',
    name: 'beforeSigning',
  })
}

/** A bare HTTP request; `sendOnly` stops after that many bytes of the body and hangs up. */
export function send(
  url: string,
  options: { method: string; headers: Record<string, string>; body?: Uint8Array; sendOnly?: number },
): Promise<{ status: number; body: string } | 'hung up'> {
  return new Promise((resolve) => {
    const outgoing = request(url, { method: options.method, headers: options.headers }, (res) => {
      const pieces: Buffer[] = []
      res.on('data', (piece: Buffer) => pieces.push(piece))
      res.on('end', () => resolve({ status: res.statusCode ?? 0, body: Buffer.concat(pieces).toString() }))
    })
    outgoing.on('error', () => resolve('hung up'))
    if (options.sendOnly === undefined) outgoing.end(options.body)
    else {
      outgoing.write(options.body?.subarray(0, options.sendOnly), () => setTimeout(() => outgoing.destroy(), 50))
    }
  })
}
