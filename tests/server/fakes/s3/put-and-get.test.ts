import { createHash, randomBytes } from 'node:crypto'
import { Readable } from 'node:stream'
import {
  CreateBucketCommand,
  DeleteObjectCommand,
  GetObjectCommand,
  HeadBucketCommand,
  HeadObjectCommand,
  ListObjectsV2Command,
  ListObjectVersionsCommand,
  PutObjectCommand,
  type S3Client,
} from '@aws-sdk/client-s3'
import { Upload } from '@aws-sdk/lib-storage'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { clientFor, codeOf, credentials, send, startWithBuckets, tampering } from './s3-client.ts'

let fake: Awaited<ReturnType<typeof startWithBuckets>>
let client: S3Client

beforeAll(async () => {
  fake = await startWithBuckets()
  client = fake.client
})
afterAll(() => fake.close())

const put = (Key: string, Body: string | Uint8Array, more: object = {}) =>
  client.send(new PutObjectCommand({ Bucket: 'plain', Key, Body, ...more }))

const text = async (Key: string, more: object = {}) => {
  const answer = await client.send(new GetObjectCommand({ Bucket: 'plain', Key, ...more }))
  return (await answer.Body?.transformToString()) ?? ''
}

const exists = (Key: string) => codeOf(client.send(new HeadObjectCommand({ Bucket: 'plain', Key })))

describe('storing and reading', () => {
  it('gives back bytes, type, metadata, entity tag and checksum', async () => {
    const body = randomBytes(100_000)
    const key = 'folder/a b+c&é%2F~(1).bin'
    const stored = await put(key, body, { ContentType: 'application/x-test', Metadata: { colour: 'verdigris' } })
    const got = await client.send(new GetObjectCommand({ Bucket: 'plain', Key: key, ChecksumMode: 'ENABLED' }))
    expect(Buffer.from((await got.Body?.transformToByteArray()) ?? [])).toEqual(body)
    expect(got).toMatchObject({
      ContentType: 'application/x-test',
      Metadata: { colour: 'verdigris' },
      ETag: stored.ETag,
    })
    expect(got.ETag).toBe(`"${createHash('md5').update(body).digest('hex')}"`)
    // The client's default is CRC32.
    expect(got.ChecksumCRC32).toBe(stored.ChecksumCRC32)
    expect(stored.ChecksumCRC32).toHaveLength(8)
  })

  it.each(['CRC32', 'CRC32C', 'SHA1', 'SHA256'] as const)(
    'stores with the checksum %s, sent by the client',
    async (algorithm) => {
      await put(`sum-${algorithm}`, 'abc', { ChecksumAlgorithm: algorithm })
      const head = await client.send(
        new HeadObjectCommand({ Bucket: 'plain', Key: `sum-${algorithm}`, ChecksumMode: 'ENABLED' }),
      )
      expect(head[`Checksum${algorithm}`]).toBeTruthy()
      // Another implementation's word on it: the client checks the body of a GET against this header.
      expect(await text(`sum-${algorithm}`, { ChecksumMode: 'ENABLED' })).toBe('abc')
    },
  )

  it('stores a stream, framed as aws-chunked with a trailer, without its framing', async () => {
    const body = randomBytes(200_000)
    const pieces = [body.subarray(0, 65536), body.subarray(65536, 131072), body.subarray(131072)]
    await client.send(
      new PutObjectCommand({
        Bucket: 'plain',
        Key: 'streamed',
        Body: Readable.from(pieces),
        ContentLength: body.length,
      }),
    )
    const got = await client.send(new GetObjectCommand({ Bucket: 'plain', Key: 'streamed', ChecksumMode: 'ENABLED' }))
    expect(Buffer.from((await got.Body?.transformToByteArray()) ?? [])).toEqual(body)
    expect(got.ChecksumCRC32).toBeTruthy()
    expect(got.ContentEncoding).toBeUndefined()
  })

  it('serves ranges and refuses one outside the object', async () => {
    await put('digits', '0123456789')
    expect(await text('digits', { Range: 'bytes=2-4' })).toBe('234')
    expect(await text('digits', { Range: 'bytes=7-' })).toBe('789')
    expect(await text('digits', { Range: 'bytes=-3' })).toBe('789')
    expect(
      await codeOf(client.send(new GetObjectCommand({ Bucket: 'plain', Key: 'digits', Range: 'bytes=10-' }))),
    ).toBe('InvalidRange')
  })

  it('names what is missing', async () => {
    expect(await codeOf(client.send(new GetObjectCommand({ Bucket: 'plain', Key: 'nothing' })))).toBe('NoSuchKey')
    expect(await codeOf(client.send(new GetObjectCommand({ Bucket: 'nowhere', Key: 'x' })))).toBe('NoSuchBucket')
    expect(await codeOf(client.send(new HeadBucketCommand({ Bucket: 'nowhere' })))).toBe('NotFound')
    expect(await codeOf(client.send(new CreateBucketCommand({ Bucket: 'plain' })))).toBe('BucketAlreadyOwnedByYou')
  })

  it('never overwrites under If-None-Match: *', async () => {
    await put('once', 'first', { IfNoneMatch: '*' })
    expect(await codeOf(put('once', 'second', { IfNoneMatch: '*' }))).toBe('PreconditionFailed')
    expect(await text('once')).toBe('first')
    // Two writers at once: one wins.
    const both = await Promise.all(['a', 'b'].map((body) => codeOf(put('race', body, { IfNoneMatch: '*' }))))
    expect(both.sort()).toEqual(['PreconditionFailed', 'accepted'])
  })
})

describe('what is refused', () => {
  it('a wrong signature, an unknown key, no signature', async () => {
    const wrong = clientFor(fake.url, { credentials: { ...credentials, secretAccessKey: 'another' } })
    const attempt = (sender: S3Client) =>
      codeOf(sender.send(new PutObjectCommand({ Bucket: 'plain', Key: 'forged', Body: 'x' })))
    expect(await attempt(wrong)).toBe('SignatureDoesNotMatch')
    expect(await attempt(clientFor(fake.url, { credentials: { ...credentials, accessKeyId: 'nobody' } }))).toBe(
      'InvalidAccessKeyId',
    )
    expect(await attempt(tampering(clientFor(fake.url), ({ headers }) => delete headers.authorization))).toBe(
      'AccessDenied',
    )
    expect(await exists('forged')).toBe('NotFound')
  })

  it('a request whose time is 16 minutes off', async () => {
    fake.clock.now = new Date(Date.now() + 16 * 60_000)
    // A client of its own: it corrects its clock after this answer.
    const late = new PutObjectCommand({ Bucket: 'plain', Key: 'late', Body: 'x' })
    expect(await codeOf(clientFor(fake.url).send(late))).toBe('RequestTimeTooSkewed')
    fake.clock.now = undefined
    expect(await exists('late')).toBe('NotFound')
  })

  it('a body changed after it was signed', async () => {
    const changed = tampering(clientFor(fake.url), (outgoing) => {
      outgoing.body = 'heads'
    })
    expect(await codeOf(changed.send(new PutObjectCommand({ Bucket: 'plain', Key: 'changed', Body: 'tails' })))).toBe(
      'XAmzContentSHA256Mismatch',
    )
    expect(await exists('changed')).toBe('NotFound')
  })

  it.each([
    ['CRC32', { ChecksumCRC32: 'AAAAAA==' }],
    ['CRC32C', { ChecksumCRC32C: 'AAAAAA==' }],
    ['CRC64NVME', { ChecksumCRC64NVME: 'AAAAAAAAAAA=' }],
    ['SHA256', { ChecksumSHA256: Buffer.alloc(32).toString('base64') }],
    ['Content-MD5', { ContentMD5: Buffer.alloc(16).toString('base64') }],
  ])('a wrong checksum: %s', async (name, wrong) => {
    expect(await codeOf(put(`wrong-${name}`, 'abc', wrong))).toBe('BadDigest')
    expect(await exists(`wrong-${name}`)).toBe('NotFound')
  })

  it('a wrong checksum in the trailer of a streamed body', async () => {
    const body = Buffer.from('5\r\nabcde\r\n0\r\nx-amz-checksum-crc32:AAAAAA==\r\n\r\n')
    const answer = await sendStreaming('bad-trailer', body, 5)
    expect(answer).toMatchObject({ status: 400, body: expect.stringContaining('<Code>BadDigest</Code>') })
    // CRC-32 of "abcde" is 8587d865 (from memory); with it the same request passes.
    const right = Buffer.from('5\r\nabcde\r\n0\r\nx-amz-checksum-crc32:hYfYZQ==\r\n\r\n')
    expect(await sendStreaming('good-trailer', right, 5)).toMatchObject({ status: 200 })
    expect(await text('good-trailer')).toBe('abcde')
    expect(await exists('bad-trailer')).toBe('NotFound')
  })

  it('a body shorter than it says, by framing or by hanging up', async () => {
    const short = Buffer.from('5\r\nabcde\r\n0\r\nx-amz-checksum-crc32:hYfYZQ==\r\n\r\n')
    expect(await sendStreaming('short', short, 6)).toMatchObject({
      status: 400,
      body: expect.stringContaining('IncompleteBody'),
    })
    expect(await sendStreaming('short', short.subarray(0, 8), 5)).toMatchObject({
      status: 400,
      body: expect.stringContaining('IncompleteBody'),
    })
    expect(await sendStreaming('short', Buffer.concat([short, Buffer.alloc(100_000)]), 5, short.length)).toBe('hung up')
    await new Promise((resolve) => setTimeout(resolve, 100))
    expect(await exists('short')).toBe('NotFound')
  })

  it('small chunks before the last, as S3 does', async () => {
    const body = Buffer.from('2\r\nab\r\n3\r\ncde\r\n0\r\nx-amz-checksum-crc32:hYfYZQ==\r\n\r\n')
    expect(await sendStreaming('small', body, 5)).toMatchObject({
      status: 403,
      body: expect.stringContaining('InvalidChunkSizeError'),
    })
  })

  it('what it cannot do, without pretending', async () => {
    const signed = await sign({ method: 'GET', path: '/plain', query: { acl: '' } })
    expect(await send(`${fake.url}/plain?acl=`, { method: 'GET', headers: signed.headers })).toMatchObject({
      status: 501,
    })
  })
})

interface Unsigned {
  method: string
  path: string
  query?: Record<string, string>
  headers?: Record<string, string>
}

const unsigned = (wanted: Unsigned) => {
  const { hostname, port, host, protocol } = new URL(fake.url)
  return { protocol, hostname, port: Number(port), query: {}, ...wanted, headers: { host, ...wanted.headers } }
}

/** Signs with the client's own signer. */
async function sign(wanted: Unsigned) {
  const signer = await client.config.signer()
  return (await signer.sign(unsigned(wanted) as never)) as unknown as { headers: Record<string, string> }
}

/** Sends a ready-framed body under STREAMING-UNSIGNED-PAYLOAD-TRAILER. */
async function sendStreaming(key: string, body: Uint8Array, decodedLength: number, sendOnly?: number) {
  const signed = await sign({
    method: 'PUT',
    path: `/plain/${key}`,
    headers: {
      'content-length': String(body.length),
      'content-encoding': 'aws-chunked',
      'x-amz-content-sha256': 'STREAMING-UNSIGNED-PAYLOAD-TRAILER',
      'x-amz-decoded-content-length': String(decodedLength),
      'x-amz-trailer': 'x-amz-checksum-crc32',
    },
  })
  return send(`${fake.url}/plain/${key}`, {
    method: 'PUT',
    headers: signed.headers,
    body,
    ...(sendOnly === undefined ? {} : { sendOnly }),
  })
}

describe('presigned addresses', () => {
  it('open one object until they expire', async () => {
    await put('shared', 'for a while')
    // The client's own signer can do this too; its declared type tells only of `sign`.
    const signer = (await client.config.signer()) as unknown as {
      presign(request: object, options: { expiresIn: number }): Promise<{ query: Record<string, string> }>
    }
    const wanted = unsigned({
      method: 'GET',
      path: '/plain/shared',
      headers: { 'x-amz-content-sha256': 'UNSIGNED-PAYLOAD' },
    })
    const { query } = await signer.presign(wanted, { expiresIn: 60 })
    const url = `${fake.url}/plain/shared?${new URLSearchParams(query)}`
    expect(await (await fetch(url)).text()).toBe('for a while')
    expect((await fetch(url.replace('shared', 'digits'))).status).toBe(403)
    expect((await fetch(url.replace('Expires=60', 'Expires=6000'))).status).toBe(403)
    fake.clock.now = new Date(Date.now() + 61_000)
    const expired = await fetch(url)
    fake.clock.now = undefined
    expect(expired.status).toBe(403)
    expect(await expired.text()).toContain('Request has expired')
  })
})

describe('listing', () => {
  it('pages through keys in byte order, with prefixes and delimiters', async () => {
    await client.send(new CreateBucketCommand({ Bucket: 'listing' }))
    // U+FF5E sorts before U+1F600 in UTF-8 but behind it in UTF-16 code units.
    const keys = ['a', 'a/1', 'a/2', 'b/1', 'b/2/x', 'c', 'é', '\uFF5E', '\u{1F600}']
    for (const Key of [...keys].reverse())
      await client.send(new PutObjectCommand({ Bucket: 'listing', Key, Body: Key }))
    const seen: string[] = []
    let pages = 0
    for (let token: string | undefined, more = true; more; pages++) {
      const page = await client.send(
        new ListObjectsV2Command({ Bucket: 'listing', MaxKeys: 2, ...(token ? { ContinuationToken: token } : {}) }),
      )
      seen.push(...(page.Contents ?? []).map((entry) => entry.Key ?? ''))
      token = page.NextContinuationToken
      more = page.IsTruncated === true
    }
    expect(seen).toEqual(keys)
    expect(pages).toBe(5)
    const folders = await client.send(new ListObjectsV2Command({ Bucket: 'listing', Delimiter: '/' }))
    expect(folders.CommonPrefixes?.map((entry) => entry.Prefix)).toEqual(['a/', 'b/'])
    expect(folders.Contents?.map((entry) => entry.Key)).toEqual(['a', 'c', 'é', '\uFF5E', '\u{1F600}'])
    const inB = await client.send(new ListObjectsV2Command({ Bucket: 'listing', Prefix: 'b/', Delimiter: '/' }))
    expect([inB.Contents?.map((entry) => entry.Key), inB.CommonPrefixes?.map((entry) => entry.Prefix)]).toEqual([
      ['b/1'],
      ['b/2/'],
    ])
    const after = await client.send(new ListObjectsV2Command({ Bucket: 'listing', StartAfter: 'b/2/x' }))
    expect(after.KeyCount).toBe(4)
  })

  it('lists versions and delete markers', async () => {
    const versioned = { Bucket: 'locked', Key: 'listed' }
    await client.send(new PutObjectCommand({ ...versioned, Body: '1' }))
    await client.send(new PutObjectCommand({ ...versioned, Body: '22' }))
    await client.send(new DeleteObjectCommand(versioned))
    const list = await client.send(new ListObjectVersionsCommand({ Bucket: 'locked', Prefix: 'listed' }))
    expect(list.Versions?.map((version) => [version.Size, version.IsLatest])).toEqual([
      [2, false],
      [1, false],
    ])
    expect(list.DeleteMarkers?.map((marker) => marker.IsLatest)).toEqual([true])
    expect((await client.send(new ListObjectsV2Command({ Bucket: 'locked', Prefix: 'listed' }))).KeyCount).toBe(0)
  })
})

describe('uploads in parts', () => {
  it('puts together what lib-storage sends in parts', async () => {
    const body = randomBytes(12 * 1024 * 1024)
    const upload = new Upload({
      client,
      params: {
        Bucket: 'plain',
        Key: 'large',
        Body: Readable.from([body.subarray(0, 7_000_000), body.subarray(7_000_000)]),
      },
      partSize: 5 * 1024 * 1024,
    })
    const done = await upload.done()
    expect(done.ETag).toMatch(/-3"$/)
    const got = await client.send(new GetObjectCommand({ Bucket: 'plain', Key: 'large' }))
    const back = Buffer.from((await got.Body?.transformToByteArray()) ?? [])
    expect(createHash('sha256').update(back).digest('hex')).toBe(createHash('sha256').update(body).digest('hex'))
  })
})
