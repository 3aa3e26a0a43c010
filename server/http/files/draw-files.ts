import { createHash } from 'node:crypto'
import { Readable } from 'node:stream'
import { pipeline } from 'node:stream/promises'
import type { Express, Request, Response } from 'express'
import type { SigningKeys } from '#server/adapters/signing/signing-keys.ts'
import { DRAW_FILES, type DrawFile } from '#server/http/authorisation/page-rules.ts'
import type { LockedArchives } from '#server/http/files/locked-archives.ts'
import { proofZip } from '#server/http/files/proof-zip.ts'
import { problem } from '#server/http/problems.ts'
import type { Database } from '#server/store/database.ts'
import {
  entriesOf,
  labelsOf,
  publishedResult,
  publishedSeal,
  storedArchive,
  transcriptOf,
} from '#server/store/queries/public-files.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { slug as slugSchema } from '#shared/schemas/values.ts'

export interface FileParts {
  readonly db: Database
  readonly keys: SigningKeys
  readonly archives: LockedArchives
}

interface Found {
  readonly type: string
  /** Strong entity tag without its quotes: changes exactly when the bytes do. */
  readonly tag: string
  readonly bytes?: Uint8Array
  readonly chunks?: () => AsyncIterable<Uint8Array>
  /** In bytes, where it is known and `bytes` is not given. */
  readonly size?: number
}

const JSON_TYPE = 'application/json'
const JSON_LINES = 'application/jsonl; charset=utf-8'
const BINARY = 'application/octet-stream'

/** Puts the public files of a draw beside its page. Each answers 404 until what it holds is public. */
export function mountDrawFiles(app: Express, parts: FileParts): void {
  for (const name of DRAW_FILES) {
    app.get(`/draws/:slug/${name}`, async (request, response) => {
      const slug = slugSchema.safeParse(request.params.slug)
      if (!slug.success) throw notPublic(name)
      if (name === 'proof.zip') return sendProof(parts, slug.data, request, response)
      const found = await find(parts, slug.data, name)
      if (!found) throw notPublic(name)
      await sendFile(found, name, request, response)
    })
  }
}

const notPublic = (name: DrawFile) =>
  problem(
    404,
    ['seal.json', 'seal.sig', 'seal.tsr', 'entries.csv', 'terms.txt', 'site-key.pem'].includes(name)
      ? 'There is no such file yet: it appears when the draw is sealed.'
      : 'There is no such file yet: it appears when the draw is drawn.',
  )

async function find(parts: FileParts, slug: string, name: DrawFile): Promise<Found | null> {
  const { db } = parts
  switch (name) {
    case 'seal.json':
    case 'seal.sig':
    case 'seal.tsr':
    case 'entries.csv':
    case 'terms.txt':
    case 'site-key.pem': {
      const seal = await publishedSeal(db, slug)
      if (!seal) return null
      if (name === 'seal.json') return { type: JSON_TYPE, tag: seal.digest, bytes: seal.bytes }
      if (name === 'seal.sig') return { type: BINARY, tag: `${seal.digest}.sig`, bytes: seal.signature }
      if (name === 'seal.tsr') {
        return seal.timestamp ? ofBytes('application/timestamp-reply', seal.timestamp) : null
      }
      if (name === 'terms.txt') return ofBytes('text/plain; charset=utf-8', utf8(seal.terms))
      if (name === 'site-key.pem') return siteKey(parts, slug, seal.keyFingerprint)
      const chunks = () => entriesOf(db, seal.id)
      return { type: 'text/csv; charset=utf-8; header=present', tag: `${seal.digest}.entries`, chunks }
    }
    case 'result.json':
    case 'result.sig':
    case 'transcript.jsonl':
    case 'labels.jsonl': {
      const result = await publishedResult(db, slug)
      if (!result) return null
      if (name === 'result.json') return { type: JSON_TYPE, tag: result.digest, bytes: result.bytes }
      if (name === 'result.sig') return { type: BINARY, tag: `${result.digest}.sig`, bytes: result.signature }
      if (name === 'labels.jsonl') return ofBytes(JSON_LINES, await labelsOf(db, result.drawId))
      return { type: JSON_LINES, tag: result.transcriptDigest, chunks: () => transcriptOf(db, result.drawId) }
    }
    case 'proof.zip':
      return null
  }
}

function ofBytes(type: string, bytes: Uint8Array): Found {
  return { type, tag: createHash('sha256').update(bytes).digest('hex'), bytes }
}

/** A key that the site holds no more is still in the archives that it signed. */
async function siteKey(parts: FileParts, slug: string, fingerprint: string): Promise<Found | null> {
  const key = parts.keys.find(fingerprint)
  if (key) return ofBytes('application/x-pem-file', utf8(key.publicKeyPem))
  const row = await storedArchive(parts.db, slug)
  if (!row) return null
  return parts.archives.use(row, async (zip) => {
    const chunks: Uint8Array[] = []
    for await (const chunk of zip.open('site-key.pem')) chunks.push(chunk)
    return ofBytes('application/x-pem-file', Buffer.concat(chunks))
  })
}

async function sendProof(parts: FileParts, slug: string, request: Request, response: Response): Promise<void> {
  const row = await storedArchive(parts.db, slug)
  if (!row) throw notPublic('proof.zip')
  const labels = await labelsOf(parts.db, row.drawId)
  const tag = createHash('sha256').update(`${row.sha256}\n`).update(labels).digest('hex')
  await parts.archives.use(row, async (locked) => {
    const { size, chunks } = await proofZip(locked, new Map(Object.entries(row.members)), labels)
    const found: Found = { type: 'application/zip', tag, size, chunks: () => chunks }
    await sendFile(found, `${slug}-proof.zip`, request, response)
  })
}

async function sendFile(found: Found, fileName: string, request: Request, response: Response): Promise<void> {
  response.setHeader('Content-Type', found.type)
  response.setHeader('Content-Disposition', `${inline(found.type) ? 'inline' : 'attachment'}; filename="${fileName}"`)
  response.setHeader('ETag', `"${found.tag}"`)
  // A seal can be replaced and a label taken down: ask each time, fetch only what has changed, and the very bytes.
  response.setHeader('Cache-Control', 'public, no-cache, no-transform')
  // These files are meant to be read by checkers anywhere, in browsers too.
  response.setHeader('Access-Control-Allow-Origin', '*')
  response.setHeader('Cross-Origin-Resource-Policy', 'cross-origin')
  const size = found.bytes?.length ?? found.size
  if (size !== undefined) response.setHeader('Content-Length', String(size))
  if (request.fresh) {
    response.removeHeader('Content-Length')
    response.status(304).end()
  } else if (request.method === 'HEAD') {
    response.end()
  } else if (found.bytes) {
    response.end(found.bytes)
  } else if (found.chunks) {
    await stream(found.chunks(), response)
  }
}

const inline = (type: string) => type.startsWith('text/plain') || type === JSON_TYPE || type === JSON_LINES

async function stream(chunks: AsyncIterable<Uint8Array>, response: Response): Promise<void> {
  try {
    await pipeline(Readable.from(chunks, { objectMode: true, highWaterMark: 2 }), response)
  } catch (error) {
    // The reader left: nothing is wrong.
    if ((error as NodeJS.ErrnoException).code !== 'ERR_STREAM_PREMATURE_CLOSE') throw error
  }
}
