import { createHash } from 'node:crypto'
import { Readable } from 'node:stream'
import express, { type Express } from 'express'
import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { deflateWithZlib } from '#server/adapters/archive/zlib-codec.ts'
import type { ObjectStore } from '#server/adapters/object-store/object-store.ts'
import type { SigningKeys } from '#server/adapters/signing/signing-keys.ts'
import { mountDrawFiles } from '#server/http/files/draw-files.ts'
import { LockedArchives } from '#server/http/files/locked-archives.ts'
import { errorHandler } from '#server/http/middleware/errors.ts'
import { createProblemOf } from '#server/http/problem-of.ts'
import { memorySource } from '#shared/archive/byte-source.ts'
import { LOCKED_MEMBERS } from '#shared/archive/members.ts'
import { readMember } from '#shared/archive/members-source.ts'
import { lockedMembers, type MemberContent } from '#shared/archive/proof-archive.ts'
import { parseSums } from '#shared/archive/sums.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { writeZip } from '#shared/archive/zip-writer.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { createTestDatabase, type TestDatabase } from '#tests/support/database.ts'
import { closedRow, drawnRow, type Row, sealedRow } from '#tests/support/rows.ts'

let database: TestDatabase
let app: Express
const archives: LockedArchives[] = []
const objects = new Map<string, Uint8Array>()
const unexpected: unknown[] = []

const store = {
  get: async (key: string) => {
    const bytes = objects.get(key)
    return bytes ? { object: { size: bytes.length }, stream: Readable.from([Buffer.from(bytes)]) } : null
  },
} as unknown as ObjectStore
const keys = { find: () => ({ publicKeyPem: 'the key\n' }) } as unknown as SigningKeys

function site(signing: SigningKeys = keys): Express {
  const held = new LockedArchives(store)
  archives.push(held)
  const made = express()
  mountDrawFiles(made, { db: database.db, keys: signing, archives: held })
  made.use(errorHandler(createProblemOf((error) => unexpected.push(error))))
  return made
}

beforeAll(async () => {
  database = await createTestDatabase()
  app = site()
})
afterAll(async () => {
  await Promise.all(archives.map((held) => held.close()))
  await database.drop()
})

const slugOf = async (row: Row) =>
  (await database.pool.query<{ slug: string }>('select slug from draw where id = $1', [row.drawId])).rows[0]
    ?.slug as string

async function lockArchive(row: Row, alter: (bytes: Uint8Array) => Uint8Array = (bytes) => bytes) {
  const contents = Object.fromEntries(
    LOCKED_MEMBERS.map((name) => [name, utf8(`${name} of ${row.drawId}\n`.repeat(300))]),
  ) as Record<(typeof LOCKED_MEMBERS)[number], MemberContent>
  const chunks: Uint8Array[] = []
  for await (const chunk of writeZip(lockedMembers(contents), { deflate: deflateWithZlib })) chunks.push(chunk)
  const bytes = Buffer.concat(chunks)
  const key = `proofs/${row.drawId}.zip`
  objects.set(key, alter(bytes))
  const sha256 = (content: Uint8Array) => createHash('sha256').update(content).digest('hex')
  const members = Object.fromEntries(LOCKED_MEMBERS.map((name) => [name, sha256(contents[name] as Uint8Array)]))
  await database.pool.query(
    `insert into archive (draw_id, key, bytes, sha256, members, verified_at, created_at)
     values ($1, $2, $3, $4, $5, now(), now())`,
    [row.drawId, key, bytes.length, sha256(bytes), JSON.stringify(members)],
  )
  return contents
}

const openLabel = (row: Row, label: string) =>
  database.pool.query(
    `insert into opened_label (draw_id, leaf, first_pick, label, label_salt) values ($1, 1, 0, $2, $3)`,
    [row.drawId, label, 'ab'.repeat(32)],
  )

describe('the files beside a draw', () => {
  it('are not there before the seal, and those of the result not before the draw', async () => {
    const closed = await slugOf(await closedRow(database.pool))
    const sealed = await slugOf(await sealedRow(database.pool))
    for (const file of ['seal.json', 'seal.sig', 'seal.tsr', 'entries.csv', 'terms.txt', 'site-key.pem']) {
      const before = await request(app).get(`/draws/${closed}/${file}`)
      expect(before.status).toBe(404)
      expect(before.type).toBe('application/problem+json')
      expect(before.body).toMatchObject({ status: 404, detail: expect.stringContaining('when the draw is sealed') })
      expect((await request(app).head(`/draws/${sealed}/${file}`)).status).toBe(200)
    }
    for (const file of ['result.json', 'result.sig', 'transcript.jsonl', 'labels.jsonl', 'proof.zip']) {
      const before = await request(app).get(`/draws/${sealed}/${file}`)
      expect(before.status).toBe(404)
      expect(before.body.detail).toContain('when the draw is drawn')
    }
  })

  it('give the signed bytes of the seal in force, and every leaf in order', async () => {
    const row = await sealedRow(database.pool)
    const slug = await slugOf(row)
    const seal = await request(app).get(`/draws/${slug}/seal.json`).responseType('blob')
    expect(
      createHash('sha256')
        .update(seal.body as Buffer)
        .digest('hex'),
    ).toBe(row.digest)
    expect(seal.headers['content-length']).toBe('40')
    expect(((await request(app).get(`/draws/${slug}/seal.sig`).responseType('blob')).body as Buffer).length).toBe(64)
    const timestamp = await request(app).get(`/draws/${slug}/seal.tsr`).responseType('blob')
    expect(timestamp.headers['content-type']).toBe('application/timestamp-reply')
    expect((timestamp.body as Buffer).toString()).toBe('0')
    const entries = await request(app).get(`/draws/${slug}/entries.csv`).responseType('blob')
    expect((entries.body as Buffer).toString()).toMatch(/^tickets,entry_commit\n3,[0-9a-f]{64}\n4,[0-9a-f]{64}\n$/)
    expect(entries.headers['content-type']).toBe('text/csv; charset=utf-8; header=present')
    expect((await request(app).get(`/draws/${slug}/terms.txt`)).text).toBe('Terms.\n')
  })

  it('answer HEAD without a body and a known entity tag with 304', async () => {
    const slug = await slugOf(await sealedRow(database.pool))
    const first = await request(app).get(`/draws/${slug}/seal.json`).responseType('blob')
    const head = await request(app).head(`/draws/${slug}/seal.json`)
    expect(head.headers.etag).toBe(first.headers.etag)
    expect(head.headers['content-length']).toBe('40')
    const again = await request(app).get(`/draws/${slug}/entries.csv`).set('If-None-Match', '"something else"')
    expect(again.status).toBe(200)
    const known = await request(app).get(`/draws/${slug}/seal.json`).set('If-None-Match', String(first.headers.etag))
    expect(known.status).toBe(304)
  })

  it('put the proof archive together with the labels of today', async () => {
    const row = await drawnRow(database.pool)
    const slug = await slugOf(row)
    const contents = await lockArchive(row)
    await openLabel(row, 'Ines O.')
    const first = await request(app).get(`/draws/${slug}/proof.zip`).responseType('blob')
    expect(first.headers['content-type']).toBe('application/zip')
    expect(first.headers['content-length']).toBe(String((first.body as Buffer).length))
    expect(first.headers['content-disposition']).toBe(`attachment; filename="${slug}-proof.zip"`)

    const zip = await openZip(memorySource(new Uint8Array(first.body as Buffer)))
    const member = async (name: string) => Buffer.from((await readMember(zip, name, 1e6)) as Uint8Array)
    for (const name of LOCKED_MEMBERS) expect(await member(name)).toEqual(Buffer.from(contents[name] as Uint8Array))
    expect((await member('labels.jsonl')).toString()).toBe(
      `{"label":"Ines O.","labelSalt":"${'ab'.repeat(32)}","leaf":1}\n`,
    )
    const sums = parseSums(await member('SHA256SUMS'))
    if (!sums.ok) throw new Error('SHA256SUMS is malformed')
    expect(sums.value.size).toBe(zip.names.length - 1)
    for (const [name, digest] of sums.value) {
      expect(
        createHash('sha256')
          .update(await member(name))
          .digest('hex'),
      ).toBe(digest)
    }

    await database.pool.query('delete from opened_label where draw_id = $1', [row.drawId])
    const second = await request(app)
      .get(`/draws/${slug}/proof.zip`)
      .set('If-None-Match', String(first.headers.etag))
      .responseType('blob')
    expect(second.status).toBe(200)
    const withdrawn = await openZip(memorySource(new Uint8Array(second.body as Buffer)))
    expect(withdrawn.size('labels.jsonl')).toBe(0)
    expect((second.body as Buffer).includes('Ines O.')).toBe(false)
  })

  it('give no archive that is not what was stored', async () => {
    const row = await drawnRow(database.pool)
    await lockArchive(row, (bytes) => bytes.map((byte, index) => (index === 50 ? byte ^ 1 : byte)))
    unexpected.length = 0
    const answer = await request(app).get(`/draws/${await slugOf(row)}/proof.zip`)
    expect(answer.status).toBe(500)
    expect(answer.body.detail).not.toContain('proofs/')
    expect(String(unexpected[0])).toContain('is not what was stored')
  })

  it('take a key that the site has retired out of the archive that it signed', async () => {
    const row = await drawnRow(database.pool)
    await lockArchive(row)
    const without = site({ find: () => undefined } as unknown as SigningKeys)
    const key = await request(without)
      .get(`/draws/${await slugOf(row)}/site-key.pem`)
      .responseType('blob')
    expect((key.body as Buffer).toString()).toContain(`site-key.pem of ${row.drawId}`)
  })

  it('know no address that is not a slug', async () => {
    expect((await request(app).get('/draws/A%00B/seal.json')).status).toBe(404)
    expect((await request(app).get('/draws/..%2F..%2Fetc/seal.json')).status).toBe(404)
  })
})
