import { asc, eq } from 'drizzle-orm'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import type { Database } from '#server/store/database.ts'
import { witness, witnessStatement, witnessWords } from '#server/store/schema/draw.ts'
import { person } from '#server/store/schema/people.ts'
import { instantOf } from '#server/time/instants.ts'

async function statementsOf(db: Database, drawId: string) {
  return db
    .select({ statement: witnessStatement, words: witnessWords.words })
    .from(witnessStatement)
    .leftJoin(witnessWords, eq(witnessWords.statementId, witnessStatement.id))
    .where(eq(witnessStatement.drawId, drawId))
    .orderBy(asc(witnessStatement.id))
}

const rowsOf = (db: Database, drawId: string) =>
  db
    .select({ witness, person: { id: person.id, name: person.name } })
    .from(witness)
    .leftJoin(person, eq(person.id, witness.personId))
    .where(eq(witness.drawId, drawId))
    .orderBy(asc(witness.createdAt), asc(witness.id))

/** The witnesses of a draw and what they said, as the public reads it. */
export async function witnessesOf(db: Database, drawId: string): Promise<DrawPage['witnesses']> {
  const [rows, statements] = await Promise.all([rowsOf(db, drawId), statementsOf(db, drawId)])
  return rows.map(({ witness: row }) => ({
    name: row.name,
    role: row.role,
    connection: row.connection,
    statements: statements
      .filter(({ statement }) => statement.witnessId === row.id)
      .map(({ statement, words }) => ({
        about: statement.about,
        verdict: statement.verdict,
        words,
        at: instantOf(statement.at),
        digest: statement.digest,
      })),
  }))
}

/** The same for the office, with the accounts behind them. */
export async function officeWitnessesOf(
  db: Database,
  drawId: string,
): Promise<Pick<OfficeDraw, 'witnesses' | 'statements'>> {
  const [rows, statements] = await Promise.all([rowsOf(db, drawId), statementsOf(db, drawId)])
  const names = new Map(rows.map(({ witness: row }) => [row.id, row.name]))
  return {
    witnesses: rows.map(({ witness: row, person: account }) => ({
      id: row.id,
      person: account,
      name: row.name,
      role: row.role,
      connection: row.connection,
    })),
    statements: statements.map(({ statement, words }) => ({
      witness: names.get(statement.witnessId) ?? '',
      about: statement.about,
      verdict: statement.verdict,
      words,
      at: instantOf(statement.at),
    })),
  }
}
