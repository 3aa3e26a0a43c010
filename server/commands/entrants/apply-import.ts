import { and, eq, sql } from 'drizzle-orm'
import { MAX_ENTRANTS } from '#shared/protocol/limits.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { notFound, refused } from '#server/commands/command-error.ts'
import { copyRows } from '#server/commands/copy-rows.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrantImport, importRow } from '#server/store/schema/entrant.ts'
import { newEntrantCode } from './codes.ts'
import { checkTotal, numbersHeldTwice } from './entrant-values.ts'

/** Brings every row of a faultless import into the list, or none. Applying an applied import does nothing. */
export async function applyImport(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly import: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    const found = await lockImport(tx, input)
    if (found.state === 'applied') return
    requireState(its, ['open'], 'import entrants')
    if (found.state !== 'ready')
      throw refused(`This import is ${found.state}: only one without errors can be brought in.`)
    if (its.entrantCount + found.entrants > MAX_ENTRANTS) throw refused('A draw holds at most 2,000,000 entrants.')
    checkTotal(its.ticketCount, found.tickets)
    await insertRows(tx, services, { drawId: its.id, importId: found.id, rows: found.entrants })
    await tx.db.delete(importRow).where(eq(importRow.importId, found.id))
    await tx.db
      .update(entrantImport)
      .set({ state: 'applied', touchedAt: services.clock.now() })
      .where(eq(entrantImport.id, found.id))
    await audit(tx, services, actor, {
      action: 'import.apply',
      organisationId: its.organisationId,
      drawId: its.id,
      subjectId: found.id,
      sentence: `Imported ${found.entrants} entrants with ${found.tickets} tickets from ${found.fileName}.`,
      after: { entrants: found.entrants, tickets: found.tickets },
    })
    await services.queue.enqueue(tx.client, 'prepare-mail', { draw: its.id, about: 'entry', import: found.id })
  })
}

/** Locks an import of a draw. */
export async function lockImport(tx: Transaction, input: { readonly draw: string; readonly import: string }) {
  const [found] = await tx.db
    .select()
    .from(entrantImport)
    .where(and(eq(entrantImport.id, input.import), eq(entrantImport.drawId, input.draw)))
    .for('update')
  if (!found) throw notFound('import')
  return found
}

async function insertRows(
  tx: Transaction,
  services: Services,
  input: { readonly drawId: string; readonly importId: string; readonly rows: number },
): Promise<void> {
  // Codes are made here, not by the database: they come from the same entropy as everything else.
  await tx.db.execute(sql`create temporary table new_code (n integer primary key, code text not null) on commit drop`)
  await copyRows(tx.client, 'new_code', ['n', 'code'], codes(services, input.rows))
  await tx.db.execute(sql`
    create temporary table new_entrant on commit drop as
    select nextval(pg_get_serial_sequence('entrant', 'id')) as id, r.*
    from (select * from import_row where import_id = ${input.importId} order by row) r`)
  await tx.db.execute(sql`
    insert into entrant (id, draw_id, code, tickets, source, import_id, added_at)
    select e.id, ${input.drawId}, c.code, e.tickets, 'import', ${input.importId}, ${services.clock.now().toISOString()}
    from (select *, row_number() over (order by row) as n from new_entrant) e join new_code c using (n) order by e.row`)
  await tx.db.execute(sql`
    insert into entrant_person (entrant_id, draw_id, name, label, email, phone, numbers)
    select id, ${input.drawId}, name, label, email, phone, numbers from new_entrant order by row`)
  try {
    await tx.db.execute(sql`
      insert into entrant_numbers (draw_id, entrant_id, series, range)
      select ${input.drawId}, e.id, r.series, int8range(r."from", r."to", '[]')
      from new_entrant e, jsonb_to_recordset(e.ranges) as r(series text, "from" bigint, "to" bigint)`)
  } catch (error) {
    const held = numbersHeldTwice(error)
    if (!held) throw error
    throw refused(
      'A ticket number in this file is held by an entrant who is in the list already, so nothing was brought in. Look for the same file imported twice, or correct the number.',
    )
  }
}

function* codes(services: Services, count: number): Generator<readonly [number, string]> {
  const given = new Set<string>()
  while (given.size < count) {
    const code = newEntrantCode(services.entropy)
    if (given.has(code)) continue
    given.add(code)
    yield [given.size, code]
  }
}
