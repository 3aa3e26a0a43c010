import { and, eq, inArray, sql } from 'drizzle-orm'
import type { EntrantRow } from '#shared/entrants/entrant-csv.ts'
import { MAX_FILE_BYTES } from '#shared/entrants/file-limit.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { copyRows, type CopyValue } from '#server/commands/copy-rows.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrantImport, importRow } from '#server/store/schema/entrant.ts'
import { RowChannel } from './row-channel.ts'
import { type ReadEntrantCsvResult, readEntrantCsv } from './read-entrant-csv.ts'

const KEPT_ERRORS = 200
const PROGRESS_EVERY_MS = 500
/** By the database's own clock, also for demo draws: the sweep tells by it whether an upload's process is still there. */
const ALIVE = sql`clock_timestamp()`
const COLUMNS = ['import_id', 'row', 'name', 'tickets', 'label', 'email', 'phone', 'numbers', 'ranges'] as const

export interface UploadInput {
  readonly draw: string
  readonly fileName: string
  /** As the sender stated it; 0 where unknown. */
  readonly bytesTotal: number
  readonly stream: AsyncIterable<Uint8Array>
  readonly signal?: AbortSignal
}

/**
 * Reads and checks a file of entrants into rows of its own; nothing joins the list yet. A file with faults keeps no row,
 * only its first errors. Half an upload leaves nothing but a note that it failed. Resolves with the import's id.
 */
export async function uploadImport(
  services: Services,
  actor: CommandActor,
  input: UploadInput,
): Promise<{ readonly id: string }> {
  const { db } = services
  const now = services.clock.now()
  const id = await inTransaction(services, async (tx) => {
    const { row } = await lockDraw(tx, { draw: input.draw })
    requireState(row, ['open'], 'import entrants')
    const [made] = await tx.db
      .insert(entrantImport)
      .values({
        drawId: row.id,
        fileName: input.fileName.normalize('NFC').slice(0, 200),
        bytesTotal: input.bytesTotal,
        createdBy: actor?.id ?? null,
        createdAt: now,
        touchedAt: ALIVE,
      })
      .returning({ id: entrantImport.id })
    if (!made) throw new Error('The import was not written.')
    return made.id
  })
  const settle = (values: Partial<typeof entrantImport.$inferInsert>) =>
    db
      .update(entrantImport)
      .set({ ...values, touchedAt: ALIVE })
      .where(eq(entrantImport.id, id))
  let bytesRead = 0
  try {
    let noted = 0
    const found = await stage(services, id, input, (bytes) => {
      bytesRead = bytes
      if (performance.now() - noted < PROGRESS_EVERY_MS) return
      noted = performance.now()
      // Progress is for a bar on a page: a lost note does no harm.
      settle({ bytesRead }).catch(() => undefined)
    })
    const faulty = found.problemCount > 0
    await inTransaction(services, async (tx) => {
      await tx.db
        .update(entrantImport)
        .set({ ...summary(found), state: faulty ? 'faulty' : 'ready', bytesRead, touchedAt: ALIVE })
        .where(and(eq(entrantImport.id, id), inArray(entrantImport.state, ['reading'])))
      const { row } = await lockDraw(tx, { draw: input.draw })
      await audit(tx, services, actor, {
        action: 'import.upload',
        organisationId: row.organisationId,
        drawId: row.id,
        subjectId: id,
        sentence: `Uploaded ${input.fileName}: ${faulty ? `${found.problemCount} errors, nothing stored` : `${found.totals.entrants} entrants to look through`}.`,
      })
    })
    return { id }
  } catch (error) {
    await db.delete(importRow).where(eq(importRow.importId, id))
    await settle({
      state: 'failed',
      bytesRead,
      failure: input.signal?.aborted
        ? 'The upload broke off, or the file was larger than 200 MB. Nothing was stored; upload it again.'
        : error instanceof CommandError
          ? error.message
          : 'The file could not be read to its end. Nothing was stored; upload it again.',
    })
    throw error
  }
}

/** Rows stream into the staging table in one transaction, which a faulty file rolls back. */
async function stage(
  services: Services,
  importId: string,
  input: UploadInput,
  onProgress: (bytes: number) => void,
): Promise<ReadEntrantCsvResult> {
  class Faulty extends Error {
    constructor(readonly result: ReadEntrantCsvResult) {
      super('faulty')
    }
  }
  const abort = new AbortController()
  input.signal?.addEventListener('abort', () => abort.abort(input.signal?.reason))
  if (input.signal?.aborted) abort.abort(input.signal.reason)
  try {
    // A stream is read once: no trying again here.
    const client = await services.pool.connect()
    try {
      await client.query('begin')
      const rows = new RowChannel<readonly CopyValue[]>()
      const copying = copyRows(client, 'import_row', COLUMNS, rows)
      copying.catch((error: unknown) => rows.fail(error))
      let found: ReadEntrantCsvResult
      try {
        found = await readEntrantCsv(limited(input.stream), {
          maxProblems: KEPT_ERRORS,
          signal: abort.signal,
          onProgress,
          onEntrant: (entrant) => rows.push(stagedRow(importId, entrant)),
        })
        rows.end()
        await copying
      } catch (error) {
        rows.fail(error)
        await copying.catch(() => undefined)
        throw error
      }
      if (found.problemCount > 0) throw new Faulty(found)
      await client.query('commit')
      return found
    } catch (error) {
      await client.query('rollback')
      throw error
    } finally {
      client.release()
    }
  } catch (error) {
    if (error instanceof Faulty) return error.result
    throw error
  }
}

async function* limited(stream: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  let size = 0
  for await (const chunk of stream) {
    size += chunk.length
    if (size > MAX_FILE_BYTES) {
      throw new CommandError('invalid', 'The file is larger than 200 MB. Split it and import the parts one by one.', [
        { field: 'file', message: 'The file is larger than 200 MB. Split it and import the parts one by one.' },
      ])
    }
    yield chunk
  }
}

const stagedRow = (importId: string, row: EntrantRow): readonly CopyValue[] => [
  importId,
  row.row,
  row.name,
  row.tickets,
  row.label,
  row.email === '' ? null : row.email,
  row.phone === '' ? null : row.phone,
  row.numbers === '' ? null : row.numbers,
  JSON.stringify(row.ranges),
]

function summary(found: ReadEntrantCsvResult) {
  return {
    rows: found.totals.entrants,
    entrants: found.totals.entrants,
    tickets: found.totals.tickets,
    errorCount: found.problemCount,
    errors: found.problems.map(({ row, column, message }) => ({ row, column, message })),
    ignoredColumns: found.notes.flatMap(({ code, message }) =>
      code === 'column-ignored' ? [/"(.*)"/.exec(message)?.[1] ?? message] : [],
    ),
  }
}
