import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createTestDatabase, type TestDatabase } from '#tests/support/database.ts'
import {
  closedRow,
  draftRow,
  drawnRow,
  insertLogEvent,
  insertResult,
  insertSeal,
  openRow,
  sealedRow,
  transaction,
} from '#tests/support/rows.ts'

let database: TestDatabase
const query = (text: string, values: unknown[] = []) => database.pool.query(text, values)
beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.drop())

/** What the database says when it refuses. */
async function refusal(action: Promise<unknown>): Promise<{ code: string; message: string; constraint?: string }> {
  try {
    await action
  } catch (error) {
    return error as { code: string; message: string; constraint?: string }
  }
  throw new Error('The database let this pass.')
}
const STATES = ['draft', 'open', 'closed', 'sealed', 'drawn', 'concluded', 'cancelled', 'failed'] as const
const LEGAL = new Set([
  'draft open',
  'draft cancelled',
  'open closed',
  'open cancelled',
  'closed open',
  'closed sealed',
  'closed cancelled',
  'sealed drawn',
  'sealed cancelled',
  'sealed failed',
  'drawn concluded',
])

describe("a draw's life", () => {
  const inState: Record<(typeof STATES)[number], () => Promise<string>> = {
    draft: async () => (await draftRow(database.pool)).drawId,
    open: async () => (await openRow(database.pool)).drawId,
    closed: async () => (await closedRow(database.pool)).drawId,
    sealed: async () => (await sealedRow(database.pool)).drawId,
    drawn: async () => (await drawnRow(database.pool)).drawId,
    async concluded() {
      const { drawId } = await drawnRow(database.pool)
      await query(`update draw set state = 'concluded' where id = $1`, [drawId])
      return drawId
    },
    async cancelled() {
      const { drawId } = await draftRow(database.pool)
      await query(`update draw set state = 'cancelled' where id = $1`, [drawId])
      return drawId
    },
    async failed() {
      const { drawId } = await sealedRow(database.pool, { demo: true, drawAt: '2026-02-01T12:00:00Z' })
      await transaction(
        database.pool,
        (c) => c.query(`update draw set state = 'failed' where id = $1`, [drawId]),
        '2026-02-08T12:00:01Z',
      )
      return drawId
    },
  }
  for (const from of STATES) {
    it(`leaves ${from} only where PRODUCT.md lets it`, async () => {
      const drawId = await inState[from]()
      for (const to of STATES) {
        if (to === from || LEGAL.has(`${from} ${to}`)) continue
        const { code, message } = await refusal(query('update draw set state = $2 where id = $1', [drawId, to]))
        expect([code, message]).toEqual(['EP001', `A draw that is ${from} cannot become ${to}.`])
      }
    })
  }
  it('begins as a draft and is never deleted', async () => {
    const { drawId, organisationId } = await draftRow(database.pool)
    const copy = `insert into draw (organisation_id, slug, title, good_cause, promoter_name, promoter_address, terms,
      time_zone, closes_at, draw_at, rule, reserves, state, opened_at) values ($1, 'born-open', '', '', '', '', '', '',
      now(), date_trunc('second', now() + interval '1 day'), 'every-ticket', 0, 'open', now())`
    expect((await refusal(query(copy, [organisationId]))).message).toBe('A draw begins as an empty draft.')
    expect((await refusal(query('delete from draw where id = $1', [drawId]))).message).toBe(
      'Rows of draw are never changed or deleted.',
    )
  })
  it('needs a seal to be sealed, and a result to be drawn', async () => {
    const { drawId } = await closedRow(database.pool)
    const sealing = query(`update draw set state = 'sealed', sealed_at = now() where id = $1`, [drawId])
    expect((await refusal(sealing)).message).toBe('A draw is sealed by a seal: there is none.')
    const sealed = await sealedRow(database.pool)
    const drawing = query(`update draw set state = 'drawn', drawn_at = now() where id = $1`, [sealed.drawId])
    expect((await refusal(drawing)).message).toBe('A draw is drawn by its result: there is none.')
  })
  it('fixes the address when it opens', async () => {
    const { drawId } = await closedRow(database.pool)
    const moved = refusal(query(`update draw set slug = 'elsewhere-now' where id = $1`, [drawId]))
    expect((await moved).message).toBe('The address of a draw is fixed when it opens for entries.')
  })
  it('copies whether it is a demo from its organisation, for good', async () => {
    const { drawId } = await draftRow(database.pool)
    const { rows } = await query('select demo from draw where id = $1', [drawId])
    expect(rows).toEqual([{ demo: false }])
    expect((await refusal(query('update draw set demo = true where id = $1', [drawId]))).code).toBe('EP001')
  })
})

describe('the list of entrants', () => {
  it('takes nobody before the draw is published, and the prizes are fixed from then on', async () => {
    const { drawId } = await draftRow(database.pool)
    const add = `insert into entrant (draw_id, code, tickets, source, added_at) values ($1, 'EEEEFFFF', 1, 'by-hand', now())`
    const more = `insert into prize (draw_id, code, position, name, quantity) values ($1, 'p2', 2, 'More', 1)`
    expect((await refusal(query(add, [drawId]))).message).toBe(
      'The entrants of a draw that is draft cannot be changed.',
    )
    await query(more, [drawId])
    await query(`update draw set state = 'open', opened_at = now() where id = $1`, [drawId])
    expect((await refusal(query(add, [drawId]))).message).toBe('A draw stands in the log before its first entrant.')
    await insertLogEvent(database.pool, drawId, 'opened')
    await query(add, [drawId])
    for (const change of [
      more,
      'delete from prize where draw_id = $1',
      'update prize set quantity = 2 where draw_id = $1',
    ]) {
      expect((await refusal(query(change, [drawId]))).message).toBe(
        'The prizes of a draw that is open cannot be changed.',
      )
    }
  })
  it('is counted by the database, and opens and closes with the draw', async () => {
    const { drawId } = await openRow(database.pool)
    const counts = async () =>
      (await query('select entrant_count, ticket_count from draw where id = $1', [drawId])).rows[0]
    expect(await counts()).toEqual({ entrant_count: 2, ticket_count: '7' })
    await query(`update entrant set tickets = 10 where draw_id = $1 and code = 'AAAABBBB'`, [drawId])
    await query(`delete from entrant where draw_id = $1 and code = 'CCCCDDDD'`, [drawId])
    expect(await counts()).toEqual({ entrant_count: 1, ticket_count: '10' })
    await query(`update draw set state = 'closed', closed_at = now() where id = $1`, [drawId])
    const sentence = 'The entrants of a draw that is closed cannot be changed.'
    for (const change of [
      `insert into entrant (draw_id, code, tickets, source, added_at) values ($1, 'EEEEFFFF', 1, 'by-hand', now())`,
      `update entrant set tickets = 11 where draw_id = $1`,
      `delete from entrant where draw_id = $1`,
      `update entrant_person set name = 'Other' where draw_id = $1`,
    ]) {
      expect((await refusal(query(change, [drawId]))).message, change).toBe(sentence)
    }
    const erased = await refusal(query('delete from entrant_person where draw_id = $1', [drawId]))
    expect(erased.message).toBe('The entrants of a draw that is closed or sealed cannot be changed.')
    expect(await counts()).toEqual({ entrant_count: 1, ticket_count: '10' })
  })
  it.each([0, -1, 4_294_967_296])('refuses %i tickets', async (tickets) => {
    const { drawId } = await openRow(database.pool)
    const added = query(
      `insert into entrant (draw_id, code, tickets, source, added_at) values ($1, 'EEEEFFFF', $2, 'by-hand', now())`,
      [drawId, tickets],
    )
    expect(await refusal(added)).toMatchObject({ code: '23514', constraint: 'entrant_tickets' })
  })
  it('lets 4,294,967,295 tickets in, and refuses a code twice', async () => {
    const { drawId } = await openRow(database.pool)
    const add = (code: string) =>
      query(
        `insert into entrant (draw_id, code, tickets, source, added_at) values ($1, $2, 4294967295, 'by-hand', now())`,
        [drawId, code],
      )
    await add('EEEEFFFF')
    expect(await refusal(add('EEEEFFFF'))).toMatchObject({ code: '23505', constraint: 'entrant_code' })
  })
  it('lets nobody hold a ticket number twice in a draw, but in another series or another draw', async () => {
    const { drawId } = await openRow(database.pool)
    const other = await openRow(database.pool)
    const hold = (draw: string, code: string, series: string, range: string) =>
      query(
        `insert into entrant_numbers (draw_id, entrant_id, series, range)
         values ($1, (select id from entrant where draw_id = $1 and code = $2), $3, $4)`,
        [draw, code, series, range],
      )
    await hold(drawId, 'AAAABBBB', '', '[101,120]')
    expect(await refusal(hold(drawId, 'CCCCDDDD', '', '[120,130]'))).toMatchObject({
      code: '23P01',
      constraint: 'entrant_numbers_held_once',
    })
    await hold(drawId, 'CCCCDDDD', '', '[121,130]')
    await hold(drawId, 'CCCCDDDD', 'A', '[101,120]')
    await hold(other.drawId, 'AAAABBBB', '', '[101,120]')
  })
  it('erases the people of a draw that is over, and then alone', async () => {
    const { drawId } = await drawnRow(database.pool)
    expect((await refusal(query(`update entrant_person set name = '' where draw_id = $1`, [drawId]))).code).toBe(
      'EP001',
    )
    expect((await query('delete from entrant_person where draw_id = $1', [drawId])).rowCount).toBe(2)
    expect(
      (await query('delete from sealed_leaf_person where seal_id = (select id from seal_in_force($1))', [drawId]))
        .rowCount,
    ).toBe(2)
  })
})

describe('what is sealed', () => {
  it('changes in no column, and neither do its prizes', async () => {
    const { drawId } = await sealedRow(database.pool)
    for (const change of [
      `title = 'Other'`,
      `terms = 'Other'`,
      `rule = 'every-ticket'`,
      `reserves = 9`,
      `good_cause = 'Other'`,
      `ticket_price_minor = 1, ticket_price_currency = 'GBP'`,
      `closes_at = closes_at - interval '1 hour'`,
      `promoter_name = 'Other'`,
      `minimum_age = 18`,
      `entrant_count = 3`,
      `ticket_count = 9`,
    ]) {
      const { message } = await refusal(query(`update draw set ${change} where id = $1`, [drawId]))
      expect(message, change).toBe('Nothing in a draw that is sealed can be changed.')
    }
    const moved = await refusal(query(`update draw set draw_at = draw_at + interval '1 day' where id = $1`, [drawId]))
    expect(moved.message).toBe('A sealed draw has the times and the counts that its seal names.')
    for (const change of [
      `update prize set name = 'Other' where draw_id = $1`,
      'delete from prize where draw_id = $1',
      `insert into prize (draw_id, code, position, name, quantity) values ($1, 'p2', 2, 'More', 1)`,
    ]) {
      expect((await refusal(query(change, [drawId]))).message, change).toBe(
        'The prizes of a draw that is sealed cannot be changed.',
      )
    }
  })

  it('needs all its leaves when the transaction commits', async () => {
    const { drawId } = await closedRow(database.pool)
    const values = { sealedAt: '2026-01-01T12:00:00Z', drawAt: '2090-01-01T12:00:00Z' }
    const sealing = transaction(database.pool, async (client) => {
      await insertSeal(client, drawId, { ...values, leaves: [3], entrants: 2, tickets: 7 })
      await client.query(`update draw set state = 'sealed', sealed_at = $2 where id = $1`, [drawId, values.sealedAt])
    })
    expect((await refusal(sealing)).message).toBe('The sealed list does not have the leaves that the seal counts.')
    const miscounted = transaction(database.pool, (client) => insertSeal(client, drawId, { ...values, leaves: [3, 5] }))
    expect((await refusal(miscounted)).message).toBe('The seal does not count what stands in the list.')
    const unsealed = transaction(database.pool, (client) => insertSeal(client, drawId, values))
    expect((await refusal(unsealed)).message).toBe('A seal makes its draw sealed.')
  })

  it('takes no leaf and no person later', async () => {
    const { drawId } = await sealedRow(database.pool)
    const leaf = `insert into sealed_leaf select id, 2, 1, sha256('1'), sha256('2'), sha256('3') from seal_in_force($1)`
    expect((await refusal(query(leaf, [drawId]))).message).toBe('Nothing is added to a list that is sealed.')
    const person = `insert into sealed_leaf_person select id, 2, 1, 'AAAAAAA9', 'L', 'N', '', '' from seal_in_force($1)`
    expect((await refusal(query(person, [drawId]))).message).toBe('Nothing is added to a list that is sealed.')
  })

  it.each([
    ['less than 120 seconds ahead', '2026-01-01T12:01:59Z', '2026-01-01T12:01:59Z', 'sealing_far_enough'],
    ['with a round before the draw', '2090-01-01T12:00:00Z', '2090-01-01T11:59:59Z', 'seal_beacon_not_before_draw'],
  ])('is not %s', async (_name, drawAt, roundAt, constraint) => {
    const { drawId } = await closedRow(database.pool, { drawAt })
    const made = transaction(database.pool, (client) =>
      insertSeal(client, drawId, { sealedAt: '2026-01-01T12:00:00Z', drawAt, roundAt }),
    )
    expect(await refusal(made)).toMatchObject({ code: '23514', constraint })
  })

  it('is refused where its draw time has come before it is complete', async () => {
    const { drawId } = await closedRow(database.pool, { drawAt: '2026-01-01T12:10:00Z' })
    const values = { sealedAt: '2026-01-01T12:00:00Z', drawAt: '2026-01-01T12:10:00Z' }
    const late = transaction(database.pool, async (client) => {
      await insertSeal(client, drawId, values)
      await client.query(`update draw set state = 'sealed', sealed_at = $2 where id = $1`, [drawId, values.sealedAt])
    })
    expect((await refusal(late)).message).toBe('The draw time has come before the seal was complete.')
  })

  it('counts only with a timestamp, as the very seal that was made', async () => {
    const { drawId } = await closedRow(database.pool)
    const values = { sealedAt: '2026-01-01T12:00:00Z', drawAt: '2090-01-01T12:00:00Z', timestampAt: null }
    await transaction(database.pool, (client) => insertSeal(client, drawId, values))
    const again = transaction(database.pool, (client) => insertSeal(client, drawId, values))
    expect((await refusal(again)).message).toBe('A seal of this draw waits for its timestamp already.')
    const columns = `draw_id, digest, bytes, signature, terms, key_fingerprint, entrants, tickets, seed_commit, beacon_chain,
      beacon_round, beacon_round_at, sealed_at, draw_at`
    const count = (root: string, stamp: string) =>
      query(
        `insert into seal (id, ${columns}, root, timestamp, timestamp_at, timestamp_authority)
         select id, ${columns}, ${root}, ${stamp} from sealing where draw_id = $1`,
        [drawId],
      )
    const stamp = `'\\x30', '2026-01-01T12:00:00Z', 'Somebody'`
    expect((await refusal(count('root', 'null, null, null'))).message).toBe(
      'A seal counts from its timestamp on: it has none.',
    )
    expect((await refusal(count(`repeat('a', 64)`, stamp))).message).toBe(
      'A seal that counts is the one that was made.',
    )
    expect(await refusal(count('root', `'\\x30', '2090-01-01T12:00:00Z', 'Somebody'`))).toMatchObject({
      constraint: 'seal_timestamp_in_time',
    })
    expect((await refusal(count('root', stamp))).message).toBe('A seal makes its draw sealed.')
  })

  it('can be discarded whole while it waits for its timestamp, and not changed; and not at all once it counts', async () => {
    const waiting = await closedRow(database.pool)
    await transaction(database.pool, (client) =>
      insertSeal(client, waiting.drawId, {
        sealedAt: '2026-01-01T12:00:00Z',
        drawAt: '2090-01-01T12:00:00Z',
        timestampAt: null,
      }),
    )
    const ofSealing = 'in (select id from sealing where draw_id = $1)'
    const deletes = [
      `delete from sealed_leaf_person where seal_id ${ofSealing}`,
      `delete from sealed_leaf where seal_id ${ofSealing}`,
      `delete from seal_secret where seal_id ${ofSealing}`,
      'delete from sealing where draw_id = $1',
    ]
    for (const change of [`update sealing set root = repeat('a', 64) where draw_id = $1`, 'truncate sealing cascade']) {
      const values = change.includes('$1') ? [waiting.drawId] : []
      expect((await refusal(query(change, values))).message).toMatch(/are never changed or deleted/)
    }
    const leaf = `insert into sealed_leaf select id, 2, 1, sha256('1'), sha256('2'), sha256('3') from sealing where draw_id = $1`
    expect((await refusal(query(leaf, [waiting.drawId]))).message).toBe('Nothing is added to a list that is sealed.')
    const counting = await sealedRow(database.pool)
    for (const statement of deletes.slice(1)) {
      expect((await refusal(query(statement, [counting.drawId]))).message, statement).toMatch(
        /never changed or deleted/,
      )
    }
    for (const statement of deletes) await query(statement, [waiting.drawId])
    expect((await query('select from sealing where draw_id = $1', [waiting.drawId])).rowCount).toBe(0)
  })

  it('is replaced only by a seal that names it', async () => {
    const { drawId, digest } = await sealedRow(database.pool)
    const replace = (supersedes: string | null) =>
      transaction(database.pool, async (client) => {
        const values = { sealedAt: '2026-01-02T12:00:00Z', drawAt: '2091-01-01T12:00:00Z', supersedes }
        await insertSeal(client, drawId, values)
        await client.query(`update draw set sealed_at = $2, draw_at = $3 where id = $1`, [
          drawId,
          values.sealedAt,
          values.drawAt,
        ])
      })
    const unnamed = 'A new seal must name the seal in force, of a draw that is sealed.'
    expect((await refusal(replace(null))).message).toBe(unnamed)
    await replace(digest)
    expect((await refusal(replace(digest))).message).toBe(unnamed)
  })
})

describe("from the beacon's round", () => {
  const drawAt = '2026-02-01T12:00:00Z'
  const LATE = 'From the time of the beacon round that the seal names nobody can stop, postpone or replace the draw.'
  it('nobody cancels: refused at the round, let pass the second before', async () => {
    const { drawId } = await sealedRow(database.pool, { demo: true, drawAt })
    const cancel = (now: string) =>
      transaction(database.pool, (c) => c.query(`update draw set state = 'cancelled' where id = $1`, [drawId]), now)
    expect((await refusal(cancel('2026-02-01T12:00:00Z'))).message).toBe(LATE)
    await cancel('2026-02-01T11:59:59Z')
  })
  it('nobody replaces the seal', async () => {
    const { drawId, digest } = await sealedRow(database.pool, { demo: true, drawAt })
    const replacing = transaction(
      database.pool,
      (c) => insertSeal(c, drawId, { sealedAt: drawAt, drawAt: '2026-03-01T12:00:00Z', supersedes: digest }),
      drawAt,
    )
    expect((await refusal(replacing)).message).toBe(LATE)
  })
  it('goes by the clock of the database, whatever a session says, unless the draw is a demo', async () => {
    const soon = new Date(Math.ceil(Date.now() / 1000) * 1000 + 121_000).toISOString()
    const { drawId } = await closedRow(database.pool, { drawAt: soon })
    const sealedAt = new Date(Date.parse(soon) - 120_000).toISOString()
    await transaction(database.pool, async (client) => {
      await insertSeal(client, drawId, { sealedAt, drawAt: soon })
      await client.query(`update draw set state = 'sealed', sealed_at = $2 where id = $1`, [drawId, sealedAt])
    })
    const early = transaction(database.pool, (c) => insertResult(c, drawId, soon), '2099-01-01T00:00:00Z')
    expect((await refusal(early)).message).toBe('A draw is not drawn before its time.')
  })
  it('draws at its round at the earliest', async () => {
    const { drawId } = await sealedRow(database.pool, { demo: true, drawAt })
    const early = transaction(database.pool, (c) => insertResult(c, drawId, drawAt), '2026-02-01T11:59:59Z')
    expect((await refusal(early)).message).toBe('A draw is not drawn before its time.')
  })
  it('fails only after 7 days', async () => {
    const { drawId } = await sealedRow(database.pool, { demo: true, drawAt })
    const fail = (now: string) =>
      transaction(database.pool, (c) => c.query(`update draw set state = 'failed' where id = $1`, [drawId]), now)
    expect((await refusal(fail('2026-02-08T11:59:59Z'))).message).toContain('for 7 days')
    await fail('2026-02-08T12:00:00Z')
  })
})

describe('what is written for good', () => {
  it('is never changed, deleted or emptied', async () => {
    const { drawId, digest } = await drawnRow(database.pool)
    await query(`insert into audit_event (at, action) values (now(), 'draw.create')`)
    await query(`insert into beacon_observation values (repeat('a', 64), 1, '', '', '', now()) on conflict do nothing`)
    await query(`insert into log_event (index, at, event, leaf) values (log_next_index(), now(), 'opened', 'x')`)
    const witness = await query(
      `insert into witness (draw_id, name, role, connection) values ($1, 'Vera Lunt', 'neighbour', 'none') returning id`,
      [drawId],
    )
    await query(
      `insert into witness_statement (draw_id, witness_id, about, verdict, digest, at) values ($1, $2, 'seal', 'confirmed', $3, now())`,
      [drawId, witness.rows[0]?.id, digest],
    )
    const tables: Record<string, string> = {
      seal: 'reason',
      sealed_leaf: 'tickets',
      result: 'seed',
      result_pick: 'leaf',
      transcript_line: 'line',
      beacon_observation: 'relay',
      audit_event: 'action',
      log_event: 'event',
      log_node: 'hash',
      witness_statement: 'verdict',
    }
    for (const [table, column] of Object.entries(tables)) {
      const { rows } = await query(`select count(*)::int as n from ${table}`)
      expect(rows[0].n, table).toBeGreaterThan(0)
      for (const change of [
        `update ${table} set ${column} = ${column}`,
        `delete from ${table}`,
        `truncate ${table} cascade`,
      ]) {
        const { code, message } = await refusal(query(change))
        expect([code, message], change).toEqual(['EP001', expect.stringContaining('are never changed or deleted.')])
      }
    }
  })
  it('has one result a draw, complete, with nothing added later', async () => {
    const { drawId } = await drawnRow(database.pool)
    const again = transaction(database.pool, (c) => insertResult(c, drawId, '2026-02-01T12:00:00Z'))
    expect((await refusal(again)).message).toBe('A result belongs to the seal in force of a sealed draw.')
    const pick = query(`insert into result_pick values ($1, 1, 0, null, null, 1, 3, 3)`, [drawId])
    expect((await refusal(pick)).message).toBe('Nothing is added to a result that stands.')
    const line = query(`insert into transcript_line values ($1, 1, '{}')`, [drawId])
    expect((await refusal(line)).message).toBe('Nothing is added to a result that stands.')
    const sealed = await sealedRow(database.pool, { demo: true, drawAt: '2026-02-01T12:00:00Z' })
    const halfway = transaction(
      database.pool,
      (c) => insertResult(c, sealed.drawId, '2026-02-01T12:00:00Z'),
      '2026-02-01T12:00:00Z',
    )
    expect((await refusal(halfway)).message).toBe('A result comes with all its picks and its whole transcript.')
  })
  it('lets words be erased, but not changed', async () => {
    const { rows } = await query(`insert into audit_event (at, action) values (now(), 'x') returning id`)
    await query(
      `insert into audit_detail (event_id, actor_name, sentence) values ($1, 'Ines Okafor', 'Made a draw.')`,
      [rows[0].id],
    )
    const changed = await refusal(
      query(`update audit_detail set sentence = 'Nothing.' where event_id = $1`, [rows[0].id]),
    )
    expect(changed.message).toBe('Rows of audit_detail can be erased, but not changed.')
    expect((await query('delete from audit_detail where event_id = $1', [rows[0].id])).rowCount).toBe(1)
  })
  it('numbers the log without a gap, also when two write at once and one gives up', async () => {
    const append = `insert into log_event (index, at, event, leaf) values (log_next_index(), now(), 'opened', 'x') returning index`
    const gap = query(`insert into log_event (index, at, event, leaf) values (1000000, now(), 'opened', 'x')`)
    expect((await refusal(gap)).message).toBe('A log event stands directly behind the last one.')
    const given = transaction(database.pool, async (client) => {
      await client.query(append)
      await new Promise((resolve) => setTimeout(resolve, 50))
      throw new Error('given up')
    })
    await Promise.all([refusal(given), ...Array.from({ length: 8 }, () => query(append))])
    const { rows } = await query('select count(*) as n, min(index) as first, max(index) + 1 as next from log_event')
    expect(rows[0]).toMatchObject({ first: '0', n: rows[0].next })
  })
})

describe('secrets of a seal', () => {
  const erase = (drawId: string, column: string) =>
    query(`update seal_secret set ${column} = null where seal_id = (select id from seal_in_force($1))`, [drawId])
  it('are kept while the seal is in force, and erased once the draw is drawn or cancelled', async () => {
    const { drawId } = await sealedRow(database.pool)
    expect((await refusal(erase(drawId, 'seed'))).message).toBe(
      'The seed of the seal in force is kept until the draw is drawn, cancelled or failed.',
    )
    expect((await refusal(erase(drawId, 'blinding_key'))).code).toBe('EP001')
    await query(`update draw set state = 'cancelled' where id = $1`, [drawId])
    await erase(drawId, 'seed')
    const drawn = await drawnRow(database.pool)
    await erase(drawn.drawId, 'seed')
    await erase(drawn.drawId, 'blinding_key')
  })
  it('are not changed', async () => {
    const { drawId } = await drawnRow(database.pool)
    const changed = query(`update seal_secret set seed = 'other' where seal_id = (select id from seal_in_force($1))`, [
      drawId,
    ])
    expect((await refusal(changed)).message).toBe('The secrets of a seal can be erased, but not changed.')
  })
})

describe('people', () => {
  it('hold no role as administrators of the site', async () => {
    const { organisationId } = await draftRow(database.pool)
    const person = async (email: string, administrator: boolean) =>
      (
        await query('insert into person (email, name, administrator) values ($1, $1, $2) returning id', [
          email,
          administrator,
        ])
      ).rows[0].id
    const member = (id: string) =>
      query(`insert into membership (organisation_id, person_id, role) values ($1, $2, 'organiser')`, [
        organisationId,
        id,
      ])
    expect((await refusal(member(await person('root@site.example', true)))).message).toBe(
      'An administrator of the site holds no role in an organisation.',
    )
    const id = await person('member@site.example', false)
    await member(id)
    expect((await refusal(member(id))).constraint).toBe('membership_one_role')
    expect((await refusal(query('update person set administrator = true where id = $1', [id]))).code).toBe('EP001')
    expect((await refusal(person('Upper@site.example', false))).constraint).toBe('person_email_lower_case')
  })
})
