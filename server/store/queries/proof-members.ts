import { and, asc, eq, gt } from 'drizzle-orm'
import { utf8 } from '#shared/bytes/bytes.ts'
import { entriesHeader, entriesLine } from '#shared/protocol/entries-csv.ts'
import { labelsBytes } from '#shared/protocol/labels.ts'
import type { Database } from '#server/store/database.ts'
import { openedLabel, transcriptLine } from '#server/store/schema/result.ts'
import { sealedLeaf } from '#server/store/schema/seal.ts'

const PAGE = 20_000

/** `entries.csv` of a seal, in pieces (PROTOCOL section 9). */
export async function* entriesOf(db: Database, sealId: number): AsyncGenerator<Uint8Array> {
  yield entriesHeader()
  for (let last = -1; ; ) {
    const rows = await db
      .select({ leaf: sealedLeaf.leaf, tickets: sealedLeaf.tickets, commit: sealedLeaf.entryCommit })
      .from(sealedLeaf)
      .where(and(eq(sealedLeaf.sealId, sealId), gt(sealedLeaf.leaf, last)))
      .orderBy(asc(sealedLeaf.leaf))
      .limit(PAGE)
    const end = rows.at(-1)
    if (!end) return
    yield utf8(rows.map(({ tickets, commit }) => entriesLine(tickets, commit)).join(''))
    last = end.leaf
  }
}

/** `transcript.jsonl` of a draw, in pieces (section 8). */
export async function* transcriptOf(db: Database, drawId: string): AsyncGenerator<Uint8Array> {
  for (let last = -1; ; ) {
    const rows = await db
      .select({ pick: transcriptLine.pick, line: transcriptLine.line })
      .from(transcriptLine)
      .where(and(eq(transcriptLine.drawId, drawId), gt(transcriptLine.pick, last)))
      .orderBy(asc(transcriptLine.pick))
      .limit(PAGE)
    const end = rows.at(-1)
    if (!end) return
    yield utf8(rows.map(({ line }) => `${line}\n`).join(''))
    last = end.pick
  }
}

/** `labels.jsonl` with the labels that are open today (section 8). */
export async function labelsOf(db: Database, drawId: string): Promise<Uint8Array> {
  const rows = await db
    .select({ label: openedLabel.label, labelSalt: openedLabel.labelSalt, leaf: openedLabel.leaf })
    .from(openedLabel)
    .where(eq(openedLabel.drawId, drawId))
    .orderBy(asc(openedLabel.firstPick))
  return labelsBytes(rows)
}
