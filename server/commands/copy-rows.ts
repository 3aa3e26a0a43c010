import { Readable } from 'node:stream'
import { setImmediate as breathe } from 'node:timers/promises'
import { pipeline } from 'node:stream/promises'
import { from as copyFrom } from 'pg-copy-streams'
import type { PoolClient } from 'pg'

export type CopyValue = string | number | Uint8Array | null

const ROWS_A_CHUNK = 2000

/** Writes many rows by COPY (text format), in the connection's transaction. Names come from code, never from people. */
export async function copyRows(
  client: PoolClient,
  table: string,
  columns: readonly string[],
  rows: Iterable<readonly CopyValue[]> | AsyncIterable<readonly CopyValue[]>,
): Promise<void> {
  const target = client.query(copyFrom(`copy ${table} (${columns.join(', ')}) from stdin`))
  await pipeline(Readable.from(chunks(rows), { objectMode: false }), target)
}

async function* chunks(
  rows: Iterable<readonly CopyValue[]> | AsyncIterable<readonly CopyValue[]>,
): AsyncGenerator<Buffer> {
  let lines: string[] = []
  for await (const row of rows) {
    lines.push(row.map(field).join('\t'))
    if (lines.length === ROWS_A_CHUNK) {
      // Rows that are made on the spot would keep everything else waiting.
      await breathe()
      yield Buffer.from(`${lines.join('\n')}\n`)
      lines = []
    }
  }
  if (lines.length > 0) yield Buffer.from(`${lines.join('\n')}\n`)
}

const ESCAPES: Readonly<Record<string, string>> = { '\\': '\\\\', '\t': '\\t', '\n': '\\n', '\r': '\\r' }

function field(value: CopyValue): string {
  if (value === null) return '\\N'
  if (typeof value === 'number') return String(value)
  if (value instanceof Uint8Array)
    return `\\\\x${Buffer.from(value.buffer, value.byteOffset, value.length).toString('hex')}`
  return value.replace(/[\\\t\n\r]/g, (character) => ESCAPES[character] ?? character)
}
