import request from 'supertest'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { putCheckpoint } from '#server/commands/put-checkpoint.ts'
import * as reference from '#tests/reference/log.ts'
import { hex, unhex, utf8 } from '#tests/reference/record.ts'
import { makeOffice, makeOpen, makeSealed, type Office, versionOf } from '#tests/support/draws.ts'
import { sealedRow } from '#tests/support/rows.ts'
import { startWebSite, type WebSite } from '#tests/support/web-site.ts'

// Everything that the log says over the network, verified by the second implementation alone.
let site: WebSite
let office: Office
const REASON = 'The hall is flooded; a new draw follows.'
beforeAll(async () => {
  site = await startWebSite()
  office = await makeOffice(site.services)
  const cancelled = await makeSealed(site.services, office, { title: 'Rained off' })
  await cancelDraw(site.services, office.promoter, {
    draw: cancelled,
    version: await versionOf(site.services, cancelled),
    reason: REASON,
    title: 'Rained off',
  })
  await putCheckpoint(site.services)
  await makeOpen(site.services, office)
  await makeSealed(site.services, office, { title: 'Spring hampers' })
})
afterAll(() => site.close())

const get = (path: string) => request(site.listener).get(path)
interface Entry {
  index: number
  leaf: string
  note: { salt: string; text: string } | null
}
const entries = async (query = '') =>
  (await get(`/api/v1/log/entries${query}`).expect(200)).body as { size: number; entries: Entry[] }
const leavesOf = async () => (await entries()).entries.map(({ leaf }) => utf8(leaf))

describe('the log over the network', () => {
  it('shows a checkpoint that its key signed over the very entries that it lists', async () => {
    const head = (await get('/api/v1/log/checkpoint').expect(200)).body as Record<string, string>
    const leaves = await leavesOf()
    const read = reference.readCheckpoint(head.note ?? '', unhex(head.publicKey ?? ''))
    expect(read).toEqual({
      origin: `${new URL(site.origin).host}/log`,
      size: leaves.length,
      root: hex(reference.treeHash(leaves)),
    })
    expect(head).toMatchObject({ ...read, keyFingerprint: site.services.signing.current.fingerprint })
    const text = await get('/log/checkpoint.txt').expect(200)
    expect(text.text).toBe(head.note)
    expect(text.headers['content-type']).toBe('text/plain; charset=utf-8')
    expect(text.headers['access-control-allow-origin']).toBe('*')
  })

  it('publishes a reason with its salt beside the entry that holds its digest alone', async () => {
    const { entries: all } = await entries()
    const noted = all.filter(({ note }) => note !== null)
    expect(noted.map(({ note }) => note?.text)).toEqual([REASON])
    const [entry] = noted
    const leaf = JSON.parse(entry?.leaf ?? '') as { note: string; event: string }
    expect(leaf.event).toBe('cancelled')
    expect(leaf.note).toBe(reference.noteDigest(unhex(entry?.note?.salt ?? ''), REASON))
    expect(all.map(({ leaf: text }) => text).join()).not.toContain('flooded')
  })

  it('still proves the entry when its reason was taken down', async () => {
    const before = await leavesOf()
    await site.database.pool.query('delete from log_note')
    expect((await entries()).entries.every(({ note }) => note === null)).toBe(true)
    expect(await leavesOf()).toEqual(before)
  })

  it('gives entries from one number to another, and no more than a hundred', async () => {
    const { size, entries: all } = await entries()
    expect(all.map(({ index }) => index)).toEqual(Array.from({ length: size }, (_, i) => i))
    expect((await entries('?from=2&to=4')).entries).toEqual(all.slice(2, 5))
    expect((await entries(`?from=${size - 1}&to=${size + 50}`)).entries).toEqual(all.slice(-1))
    expect((await entries(`?from=${size}`)).entries).toEqual([])
    expect((await entries('?from=5&to=2')).entries).toEqual([])
    for (const bad of ['?from=-1', '?from=x', '?from=1.5', '?to=9007199254740992']) {
      await get(`/api/v1/log/entries${bad}`).expect(400)
    }
  })

  it('proves every entry at every size', async () => {
    const leaves = await leavesOf()
    for (let size = 1; size <= leaves.length; size += 1) {
      const part = leaves.slice(0, size)
      for (const index of new Set([0, size >> 1, size - 1])) {
        const { body } = await get(`/api/v1/log/inclusion?index=${index}&size=${size}`).expect(200)
        const { path, root, leaf } = body as { path: string[]; root: string; leaf: string }
        expect(leaf).toBe(part[index]?.toString('utf8'))
        expect(root).toBe(hex(reference.treeHash(part)))
        const leafHash = reference.treeHash([utf8(leaf)])
        expect(hex(reference.rootFromPath(index, size, leafHash, path.map(unhex)) ?? Buffer.alloc(0))).toBe(root)
      }
    }
  })

  it('proves that it only grew, between every two sizes', async () => {
    const leaves = await leavesOf()
    for (let second = 1; second <= leaves.length; second += 1) {
      for (const first of new Set([1, (second >> 1) + 1, second])) {
        const { body } = await get(`/api/v1/log/consistency?first=${first}&second=${second}`).expect(200)
        const { path, firstRoot, secondRoot } = body as { path: string[]; firstRoot: string; secondRoot: string }
        expect(firstRoot).toBe(hex(reference.treeHash(leaves.slice(0, first))))
        expect(secondRoot).toBe(hex(reference.treeHash(leaves.slice(0, second))))
        const roots = reference.rootsFromProof(first, second, unhex(firstRoot), path.map(unhex))
        expect(roots?.map(hex)).toEqual([firstRoot, secondRoot])
      }
    }
  })

  it('says so where it has no such entry or size', async () => {
    const size = (await entries()).size
    for (const path of [
      `inclusion?index=${size}&size=${size}`,
      `inclusion?index=0&size=${size + 1}`,
      `consistency?first=2&second=1`,
      `consistency?first=1&second=${size + 1}`,
    ]) {
      const { body } = await get(`/api/v1/log/${path}`).expect(404)
      expect((body as { detail: string }).detail).toContain('no such entry or size')
    }
    for (const path of ['inclusion?index=0&size=0', 'inclusion?size=3', 'consistency?first=0&second=1']) {
      await get(`/api/v1/log/${path}`).expect(400)
    }
  })

  it('is open to pages of other sites; what never changes may be kept, and the rest is asked for anew', async () => {
    for (const [path, kept] of [
      ['checkpoint', false],
      ['entries?from=0', false],
      ['inclusion?index=0&size=1', true],
      ['consistency?first=1&second=2', true],
    ] as const) {
      const { headers } = await get(`/api/v1/log/${path}`).set('Origin', 'https://elsewhere.example').expect(200)
      expect(headers['access-control-allow-origin'], path).toBe('*')
      expect(String(headers['cache-control']).includes('immutable'), path).toBe(kept)
      expect(headers['set-cookie'], path).toBeUndefined()
    }
    const { headers } = await get('/api/v1/log/inclusion?index=0&size=100000').expect(404)
    expect(String(headers['cache-control'])).not.toContain('immutable')
  })

  it('proves the entries of one draw to the head, and of no draft', async () => {
    const { rows } = await site.database.pool.query(`select slug from draw where title = 'Spring hampers'`)
    const { body } = await get(`/api/draws/${rows[0].slug}/log`).expect(200)
    const { head, entries: own } = body as {
      head: { size: number; root: string }
      entries: { index: number; leaf: string; path: string[] }[]
    }
    expect(own.map(({ leaf }) => (JSON.parse(leaf) as { event: string }).event)).toEqual(['opened', 'closed', 'sealed'])
    for (const { index, leaf, path } of own) {
      const top = reference.rootFromPath(index, head.size, reference.treeHash([utf8(leaf)]), path.map(unhex))
      expect(hex(top ?? Buffer.alloc(0))).toBe(head.root)
    }
    await get('/api/draws/no-such-draw/log').expect(404)
  })
})

describe('the page of an entry', () => {
  it('is found by its number, however the log grows', async () => {
    const { size } = await entries()
    for (const index of [0, size - 1]) {
      const { body } = await get(`/api/log?at=${index}`).expect(200)
      expect((body as { items: { index: number }[] }).items.map((item) => item.index)).toContain(index)
    }
    const beyond = (await get(`/api/log?at=${size + 5}`).expect(200)).body as { page: number; total: number }
    expect([beyond.page, beyond.total]).toEqual([1, size])
  })
})

describe('overdue draws', () => {
  it('stand on the public list from their time on until they are drawn or failed', async () => {
    const overdue = async () =>
      ((await get('/api/log/state').expect(200)).body as { overdue: { slug: string; seal: string; drawAt: string }[] })
        .overdue
    expect(await overdue()).toEqual([])
    const { drawId, digest } = await sealedRow(site.database.pool, { demo: true, drawAt: '2026-02-01T12:00:00Z' })
    await sealedRow(site.database.pool, { demo: true, drawAt: '2090-02-01T12:00:00Z' })
    expect(await overdue()).toMatchObject([{ seal: digest, drawAt: '2026-02-01T12:00:00Z' }])
    await site.database.pool.query(`update draw set state = 'failed' where id = $1`, [drawId])
    expect(await overdue()).toEqual([])
  })
})
