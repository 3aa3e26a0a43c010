import { createHash, randomBytes } from 'node:crypto'
import type { Pool, PoolClient } from 'pg'

/** Bare rows for tests of what the database itself refuses: no command is used here. */

export interface Row {
  readonly organisationId: string
  readonly drawId: string
}

/** Runs statements in one transaction, at another time for demo draws where one is given. */
export async function transaction<T>(
  pool: Pool,
  use: (client: PoolClient) => Promise<T>,
  demoNow?: string,
): Promise<T> {
  const client = await pool.connect()
  try {
    await client.query('begin')
    if (demoNow) await client.query(`select set_config('evenpenny.demo_now', $1, true)`, [demoNow])
    const value = await use(client)
    await client.query('commit')
    return value
  } catch (error) {
    await client.query('rollback')
    throw error
  } finally {
    client.release()
  }
}

/** A draft with one prize, in an organisation of its own. */
export async function draftRow(
  pool: Pool,
  options: { readonly demo?: boolean; readonly drawAt?: string } = {},
): Promise<Row> {
  const mark = randomBytes(5).toString('hex')
  const drawAt = options.drawAt ?? '2090-01-01T12:00:00Z'
  const organisationId = (
    await pool.query<{ id: string }>(
      `insert into organisation (slug, name, address, about, time_zone, currency, state, demo)
       values ($1, 'Rowan Street Band', '1 Rowan Street', 'A brass band.', 'Europe/London', 'GBP', 'approved', $2) returning id`,
      [`org-${mark}`, options.demo ?? false],
    )
  ).rows[0]?.id as string
  const drawId = (
    await pool.query<{ id: string }>(
      `insert into draw (organisation_id, slug, title, good_cause, promoter_name, promoter_address, terms, time_zone,
         closes_at, draw_at, rule, reserves)
       values ($1, $2, 'Spring draw', 'New instruments', 'Ines Okafor', '1 Rowan Street', E'Terms.\n', 'Europe/London',
         $3::timestamptz - interval '1 hour', $3, 'one-prize-each', 1) returning id`,
      [organisationId, `draw-${mark}`, drawAt],
    )
  ).rows[0]?.id as string
  await pool.query(`insert into prize (draw_id, code, position, name, quantity) values ($1, 'p1', 1, 'Hamper', 1)`, [
    drawId,
  ])
  return { organisationId, drawId }
}

/** An entry of the log; its leaf is any text. */
export async function insertLogEvent(
  client: PoolClient | Pool,
  drawId: string,
  event: string,
  digest: string | null = null,
  supersedes: string | null = null,
): Promise<void> {
  await client.query(
    `insert into log_event (index, at, event, draw_id, organisation, digest, supersedes, leaf)
     values (log_next_index(), now(), $2, $1, 'rowan-street-band', $3, $4, $5)`,
    [drawId, event, digest, supersedes, Buffer.from(hex())],
  )
}

/** An open draw with two entrants, of 3 and 4 tickets. */
export async function openRow(
  pool: Pool,
  options: { readonly demo?: boolean; readonly drawAt?: string } = {},
): Promise<Row> {
  const row = await draftRow(pool, options)
  await pool.query(`update draw set state = 'open', opened_at = now() where id = $1`, [row.drawId])
  await insertLogEvent(pool, row.drawId, 'opened')
  await pool.query(
    `with added as (
       insert into entrant (draw_id, code, tickets, source, added_at)
       values ($1, 'AAAABBBB', 3, 'by-hand', now()), ($1, 'CCCCDDDD', 4, 'by-hand', now()) returning id, draw_id, code)
     insert into entrant_person (entrant_id, draw_id, name, label)
     select id, draw_id, 'Person ' || code, 'P. ' || code from added`,
    [row.drawId],
  )
  return row
}

export async function closedRow(
  pool: Pool,
  options: { readonly demo?: boolean; readonly drawAt?: string } = {},
): Promise<Row> {
  const row = await openRow(pool, options)
  await pool.query(`update draw set state = 'closed', closed_at = now() where id = $1`, [row.drawId])
  return row
}

export interface SealValues {
  readonly sealedAt: string
  readonly drawAt: string
  readonly roundAt?: string
  readonly supersedes?: string | null
  readonly seedCommit?: string
  /** The time of its timestamp; null: it has none, and does not count. By default the time of the seal. */
  readonly timestampAt?: string | null
  /** Leaves the log without an entry of it. */
  readonly unlogged?: boolean
  readonly leaves?: readonly number[]
  readonly entrants?: number
  readonly tickets?: number
}

const SEAL_COLUMNS = `draw_id, digest, bytes, signature, terms, key_fingerprint, root, entrants, tickets, seed_commit,
  beacon_chain, beacon_round, beacon_round_at, sealed_at, draw_at, supersedes, reason, added, removed, changed`

/** A seal with all that belongs to it and a timestamp; the bytes are any bytes. Returns its digest. */
export async function insertSeal(client: PoolClient | Pool, drawId: string, values: SealValues): Promise<string> {
  const bytes = randomBytes(40)
  const digest = createHash('sha256').update(bytes).digest('hex')
  const leaves = values.leaves ?? [3, 4]
  const { rows } = await client.query<{ id: string }>(
    `insert into sealing (${SEAL_COLUMNS}, draw_version, made_at)
     values ($1, $2, $3, $4, E'Terms.\n', $5, $6, $7, $8, $9, $10, 7, $11, $12, $13, $14, $15, $16, $16, $16, 1, now())
     returning id`,
    [
      drawId,
      digest,
      bytes,
      randomBytes(64),
      hex(),
      hex(),
      values.entrants ?? leaves.length,
      values.tickets ?? leaves.reduce((sum, tickets) => sum + tickets, 0),
      values.seedCommit ?? hex(),
      hex(),
      values.roundAt ?? values.drawAt,
      values.sealedAt,
      values.drawAt,
      values.supersedes ?? null,
      values.supersedes ? 'The hall was flooded.' : null,
      values.supersedes ? 0 : null,
    ],
  )
  const id = rows[0]?.id
  await client.query('insert into seal_secret (seal_id, seed, blinding_key) values ($1, $2, $3)', [
    id,
    randomBytes(60),
    randomBytes(60),
  ])
  for (const [leaf, tickets] of leaves.entries()) {
    await client.query('insert into sealed_leaf values ($1, $2, $3, $4, $5, $6)', [
      id,
      leaf,
      tickets,
      randomBytes(32),
      randomBytes(32),
      randomBytes(32),
    ])
    await client.query(
      `insert into sealed_leaf_person (seal_id, leaf, entrant_id, reference, label, name, contact, numbers)
       values ($1, $2, 1, $3, 'P.', 'Person', '', '')`,
      [id, leaf, `AAAAAAA${leaf + 2}`],
    )
  }
  if (values.timestampAt === null) return digest
  await client.query(
    `insert into seal (id, ${SEAL_COLUMNS}, timestamp, timestamp_at, timestamp_authority)
     select id, ${SEAL_COLUMNS}, '\\x30', $2, 'Somebody' from sealing where id = $1`,
    [id, values.timestampAt ?? values.sealedAt],
  )
  if (values.unlogged) return digest
  const supersedes = values.supersedes ?? null
  await insertLogEvent(client, drawId, supersedes === null ? 'sealed' : 'replaced', digest, supersedes)
  return digest
}

/** A sealed draw: by default sealed on 1 January 2026 for the draw time given. */
export async function sealedRow(
  pool: Pool,
  options: { readonly demo?: boolean; readonly drawAt?: string } = {},
): Promise<Row & { readonly digest: string; readonly drawAt: string }> {
  const drawAt = options.drawAt ?? '2090-01-01T12:00:00Z'
  const sealedAt = '2026-01-01T12:00:00Z'
  const row = await closedRow(pool, { ...options, drawAt })
  const digest = await transaction(
    pool,
    async (client) => {
      const made = await insertSeal(client, row.drawId, { sealedAt, drawAt })
      await client.query(`update draw set state = 'sealed', sealed_at = $2 where id = $1`, [row.drawId, sealedAt])
      return made
    },
    sealedAt,
  )
  return { ...row, digest, drawAt }
}

/** The result of a sealed draw, whole. */
export async function insertResult(
  client: PoolClient,
  drawId: string,
  drawnAt: string,
  options: { readonly unlogged?: boolean } = {},
): Promise<string> {
  const bytes = randomBytes(40)
  const digest = createHash('sha256').update(bytes).digest('hex')
  await client.query(
    `insert into result (draw_id, seal_id, digest, bytes, signature, transcript_digest, drawn_at, picks)
     values ($1, (select id from seal_in_force($1)), $2, $3, $4, $5, $6, 1)`,
    [drawId, digest, bytes, randomBytes(64), hex(), drawnAt],
  )
  await client.query(
    `insert into result_pick (draw_id, pick, leaf, prize, item, tickets_in, remaining) values ($1, 0, 1, 'p1', 1, 4, 7)`,
    [drawId],
  )
  await client.query(`insert into transcript_line (draw_id, pick, line) values ($1, 0, '{}')`, [drawId])
  if (!options.unlogged) await insertLogEvent(client, drawId, 'drawn', digest)
  return digest
}

export async function drawnRow(pool: Pool): Promise<Row & { readonly digest: string; readonly resultDigest: string }> {
  const drawAt = '2026-02-01T12:00:00Z'
  const row = await sealedRow(pool, { demo: true, drawAt })
  const resultDigest = await transaction(
    pool,
    async (client) => {
      const made = await insertResult(client, row.drawId, drawAt)
      await client.query(`update draw set state = 'drawn', drawn_at = $2 where id = $1`, [row.drawId, drawAt])
      return made
    },
    '2026-02-01T12:00:05Z',
  )
  return { ...row, resultDigest }
}

const hex = () => randomBytes(32).toString('hex')
