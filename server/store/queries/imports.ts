import { and, asc, desc, eq } from 'drizzle-orm'
import type { ImportView, listImports as listEndpoint } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Database } from '#server/store/database.ts'
import { entrantImport, importRow } from '#server/store/schema/entrant.ts'
import { person } from '#server/store/schema/people.ts'
import { instantOf } from '#server/time/instants.ts'

const PREVIEW_ROWS = 20

type Row = typeof entrantImport.$inferSelect

function present(row: Row, createdBy: string | null): Omit<ImportView, 'errors' | 'preview'> {
  return {
    id: row.id,
    fileName: row.fileName,
    state: row.state,
    bytesRead: row.bytesRead,
    bytesTotal: row.bytesTotal,
    rows: row.rows,
    entrants: row.entrants,
    tickets: row.tickets,
    errorCount: row.errorCount,
    ignoredColumns: row.ignoredColumns,
    failure: row.failure,
    createdAt: instantOf(row.createdAt),
    createdBy: createdBy ?? '',
  }
}

/** How far an import is, and what it found; null where there is none in this draw. */
export async function getImport(
  db: Database,
  input: { readonly draw: string; readonly import: string },
): Promise<ImportView | null> {
  const [[found], preview] = await Promise.all([
    db
      .select({ row: entrantImport, name: person.name })
      .from(entrantImport)
      .leftJoin(person, eq(person.id, entrantImport.createdBy))
      .where(and(eq(entrantImport.id, input.import), eq(entrantImport.drawId, input.draw))),
    db
      .select()
      .from(importRow)
      .where(eq(importRow.importId, input.import))
      .orderBy(asc(importRow.row))
      .limit(PREVIEW_ROWS),
  ])
  if (!found) return null
  return {
    ...present(found.row, found.name),
    errors: found.row.errors,
    preview: preview.map(({ row, name, tickets, label, email, phone, numbers }) => ({
      row,
      name,
      tickets,
      label,
      email,
      phone,
      numbers,
    })),
  }
}

/** Imports of a draw, newest first. */
export async function listImports(db: Database, drawId: string): Promise<ResponseOf<typeof listEndpoint>> {
  const rows = await db
    .select({ row: entrantImport, name: person.name })
    .from(entrantImport)
    .leftJoin(person, eq(person.id, entrantImport.createdBy))
    .where(eq(entrantImport.drawId, drawId))
    .orderBy(desc(entrantImport.createdAt))
    .limit(100)
  return rows.map(({ row, name }) => present(row, name))
}
