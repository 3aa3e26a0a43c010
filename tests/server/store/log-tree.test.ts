import { cpSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { drizzle } from 'drizzle-orm/node-postgres'
import { migrate } from 'drizzle-orm/node-postgres/migrator'
import pg from 'pg'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { refusalOf } from '#server/store/database.ts'
import { migrateDatabase } from '#server/store/migrate-database.ts'
import { logConsistencyProof, logInclusionProof, logRoot, logSize } from '#server/store/queries/log-tree.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { buildLogTree, logLeafHash } from '#shared/merkle/rfc9162.ts'
import { createTestDatabase, type TestDatabase } from '#tests/support/database.ts'
import { closedRow, insertResult, insertSeal, sealedRow, transaction } from '#tests/support/rows.ts'

let database: TestDatabase
beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.drop())

const query = (text: string, values: unknown[] = []) => database.pool.query(text, values)
const append = (leaf: string, on: { query: pg.Pool['query'] } = database.pool) =>
  on.query(`insert into log_event (index, at, event, leaf) values (log_next_index(), now(), 'opened', $1)`, [
    Buffer.from(leaf),
  ])
async function refusal(work: Promise<unknown>): Promise<string> {
  try {
    await work
  } catch (error) {
    return refusalOf(error)?.message ?? String(error)
  }
  return 'taken'
}
/** The tree of the leaves that the table holds, built by the shared code. */
async function treeOf(db: { query: pg.Pool['query'] }) {
  const { rows } = await db.query<{ leaf: Buffer }>('select leaf from log_event order by index')
  return buildLogTree(
    sha256,
    rows.map(({ leaf }) => logLeafHash(sha256, new Uint8Array(leaf))),
  )
}

describe('the stored tree of the log', () => {
  test('is that of RFC 9162 with many who append at once, some of whom give up', async () => {
    const writers = Array.from({ length: 40 }, (_, i) =>
      refusal(
        transaction(database.pool, async (client) => {
          await append(`entry ${i} a`, client as unknown as pg.Pool)
          if (i % 3 === 0) await append(`entry ${i} b`, client as unknown as pg.Pool)
          if (i % 7 === 0) throw new Error('given up')
        }),
      ),
    )
    expect((await Promise.all(writers)).filter((outcome) => outcome !== 'taken')).toHaveLength(6)
    const tree = await treeOf(database.pool)
    const size = await logSize(database.db)
    expect(size).toBe(46)
    expect(tree.size).toBe(size)
    expect(toHex(await logRoot(database.db, sha256, size))).toBe(toHex(tree.root))
    for (let index = 0; index < size; index += 1) {
      const inclusion = await logInclusionProof(database.db, sha256, index, size)
      expect(inclusion.map(toHex)).toEqual(tree.inclusionProof(index).map(toHex))
      const consistency = await logConsistencyProof(database.db, sha256, index + 1, size)
      expect(consistency.map(toHex)).toEqual(tree.consistencyProof(index + 1).map(toHex))
    }
    const { rows } = await query('select count(*)::int as n from log_node')
    // 46 leaves complete 23 + 11 + 5 + 2 + 1 subtrees of more than one.
    expect(rows[0].n).toBe(46 + 42)
  })
  test('knows no size and no entry beyond its end', async () => {
    const size = await logSize(database.db)
    await expect(logRoot(database.db, sha256, size + 1)).rejects.toThrow(RangeError)
    await expect(logInclusionProof(database.db, sha256, size, size)).rejects.toThrow(RangeError)
    await expect(logInclusionProof(database.db, sha256, 0, size + 1)).rejects.toThrow(RangeError)
    await expect(logConsistencyProof(database.db, sha256, 1, size + 1)).rejects.toThrow(RangeError)
  })
  test('grows with leaves only, and is never changed', async () => {
    const sentence = 'The tree of the log grows with its leaves, and in no other way.'
    expect(await refusal(query(`insert into log_node values (0, 100000, sha256('x'))`))).toBe(sentence)
    expect(await refusal(query(`select log_grow(100000, 'x')`))).toBe(sentence)
    for (const change of ['update log_node set index = index', 'delete from log_node', 'truncate log_node']) {
      expect(await refusal(query(change))).toContain('are never changed or deleted.')
    }
  })
  test('is built for the entries of a database from before it', async () => {
    const { rows } = await query('select current_database() as name')
    const name = `${rows[0].name}_before`
    await query(`create database ${name}`)
    const url = database.url.replace(/\/[^/]*$/, `/${name}`)
    const folder = mkdtempSync(join(tmpdir(), 'evenpenny-migrations-'))
    const client = new pg.Client({ connectionString: url })
    try {
      cpSync(join(import.meta.dirname, '../../../drizzle'), folder, { recursive: true })
      const journal = join(folder, 'meta/_journal.json')
      const all = JSON.parse(readFileSync(journal, 'utf8')) as { entries: { tag: string }[] }
      const until = all.entries.findIndex(({ tag }) => tag === '0005_log_tree')
      expect(until).toBe(5)
      writeFileSync(journal, JSON.stringify({ ...all, entries: all.entries.slice(0, until) }))
      await client.connect()
      await migrate(drizzle(client), { migrationsFolder: folder })
      for (let i = 0; i < 11; i += 1) await append(`older ${i}`, client as unknown as pg.Pool)
      await migrateDatabase(url)
      await migrateDatabase(url)
      await append('newer', client as unknown as pg.Pool)
      const tree = await treeOf(client as unknown as pg.Pool)
      expect(tree.size).toBe(12)
      expect(toHex(await logRoot(drizzle(client, { casing: 'snake_case' }) as never, sha256, 12))).toBe(
        toHex(tree.root),
      )
    } finally {
      await client.end()
      rmSync(folder, { recursive: true, force: true })
      await query(`drop database ${name} with (force)`)
    }
  })
})

describe('stored checkpoints', () => {
  const insert = (size: number, root: Uint8Array) =>
    query(`insert into log_checkpoint (size, root, note, at) values ($1, $2, 'note', now())`, [size, Buffer.from(root)])
  test('have the root of the log at their size', async () => {
    const sentence = 'A checkpoint has the root that the log has at its size.'
    const size = await logSize(database.db)
    expect(await refusal(insert(size, sha256(utf8('another'))))).toBe(sentence)
    expect(await refusal(insert(size - 1, await logRoot(database.db, sha256, size)))).toBe(sentence)
    expect(await refusal(insert(size + 1, await logRoot(database.db, sha256, size)))).toBe(sentence)
    for (const at of [1, 2, 3, 32, size]) await insert(at, await logRoot(database.db, sha256, at))
  })
  test('are noted as stored once, and otherwise never changed', async () => {
    await query('update log_checkpoint set stored_at = now() where size = 3')
    for (const change of [
      'update log_checkpoint set stored_at = now() where size = 3',
      `update log_checkpoint set note = 'other' where size = 2`,
      'delete from log_checkpoint where size = 2',
    ]) {
      expect(await refusal(query(change))).toBe('A checkpoint is never changed or deleted.')
    }
  })
})

describe('seals, results and the log', () => {
  const values = { sealedAt: '2026-01-01T12:00:00Z', drawAt: '2090-01-01T12:00:00Z' }
  const seal = (drawId: string, more: { seedCommit?: string; unlogged?: boolean }) =>
    refusal(
      transaction(database.pool, async (client) => {
        await insertSeal(client, drawId, { ...values, ...more })
        await client.query(`update draw set state = 'sealed', sealed_at = $2 where id = $1`, [drawId, values.sealedAt])
      }),
    )
  test('a seal without its entry is refused when the transaction commits', async () => {
    const { drawId } = await closedRow(database.pool)
    expect(await seal(drawId, { unlogged: true })).toBe('A seal stands in the log from the moment it is made.')
    expect(await seal(drawId, {})).toBe('taken')
  })
  test('a result without its entry is refused when the transaction commits', async () => {
    const drawAt = '2026-02-01T12:00:00Z'
    const { drawId } = await sealedRow(database.pool, { demo: true, drawAt })
    const draw = (logged: boolean) =>
      refusal(
        transaction(
          database.pool,
          async (client) => {
            await insertResult(client, drawId, drawAt, { unlogged: !logged })
            await client.query(`update draw set state = 'drawn', drawn_at = $2 where id = $1`, [drawId, drawAt])
          },
          drawAt,
        ),
      )
    expect(await draw(false)).toBe('A result stands in the log from the moment it is made.')
    expect(await draw(true)).toBe('taken')
  })
  test('a second seal must replace the one in force', async () => {
    const { drawId, digest } = await sealedRow(database.pool)
    const again = (supersedes: string | null) =>
      refusal(transaction(database.pool, (client) => insertSeal(client, drawId, { ...values, supersedes })))
    const sentence = 'A new seal must name the seal in force, of a draw that is sealed.'
    expect(await again(null)).toBe(sentence)
    expect(await again('ab'.repeat(32))).toBe(sentence)
    expect(await again(digest)).toBe('taken')
    // The first one is no longer in force.
    expect(await again(digest)).toBe(sentence)
  })
  test('a seed commitment seen before is refused, in any draw', async () => {
    const seedCommit = 'cd'.repeat(32)
    const [first, second] = [await closedRow(database.pool), await closedRow(database.pool)]
    expect(await seal(first.drawId, { seedCommit })).toBe('taken')
    expect(await seal(second.drawId, { seedCommit })).toContain('sealing_seedCommit_unique')
  })
})
