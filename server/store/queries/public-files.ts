import { and, asc, desc, eq, gt, isNotNull, ne } from 'drizzle-orm'
import { entriesHeader, entriesLine } from '#shared/protocol/entries-csv.ts'
import { labelsBytes } from '#shared/protocol/labels.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import type { Database } from '../database.ts'
import { draw } from '../schema/draw.ts'
import { archive, openedLabel, result, transcriptLine } from '../schema/result.ts'
import { seal, sealedLeaf } from '../schema/seal.ts'

const BATCH = 5000

/** The seal in force of a public draw, with its signed bytes; null before there is one. */
export async function publishedSeal(db: Database, slug: string) {
  const [found] = await db
    .select({
      id: seal.id,
      drawId: seal.drawId,
      digest: seal.digest,
      bytes: seal.bytes,
      signature: seal.signature,
      timestamp: seal.timestamp,
      terms: seal.terms,
      keyFingerprint: seal.keyFingerprint,
    })
    .from(seal)
    .innerJoin(draw, eq(draw.id, seal.drawId))
    .where(and(eq(draw.slug, slug), ne(draw.state, 'draft')))
    .orderBy(desc(seal.id))
    .limit(1)
  return found ?? null
}

/** The result of a draw, with its signed bytes; null before there is one. */
export async function publishedResult(db: Database, slug: string) {
  const [found] = await db
    .select({
      drawId: result.drawId,
      digest: result.digest,
      bytes: result.bytes,
      signature: result.signature,
      transcriptDigest: result.transcriptDigest,
    })
    .from(result)
    .innerJoin(draw, eq(draw.id, result.drawId))
    .where(eq(draw.slug, slug))
  return found ?? null
}

/** `entries.csv` of a seal, in pieces of some thousand lines. */
export async function* entriesOf(db: Database, sealId: number): AsyncGenerator<Uint8Array> {
  yield entriesHeader()
  for (let last = -1; ; ) {
    const rows = await db
      .select({ leaf: sealedLeaf.leaf, tickets: sealedLeaf.tickets, entryCommit: sealedLeaf.entryCommit })
      .from(sealedLeaf)
      .where(and(eq(sealedLeaf.sealId, sealId), gt(sealedLeaf.leaf, last)))
      .orderBy(asc(sealedLeaf.leaf))
      .limit(BATCH)
    if (rows.length === 0) return
    yield utf8(rows.map(({ tickets, entryCommit }) => entriesLine(tickets, entryCommit)).join(''))
    last = rows.at(-1)?.leaf ?? last
  }
}

/** `transcript.jsonl` of a draw, in pieces. */
export async function* transcriptOf(db: Database, drawId: string): AsyncGenerator<Uint8Array> {
  for (let last = -1; ; ) {
    const rows = await db
      .select({ pick: transcriptLine.pick, line: transcriptLine.line })
      .from(transcriptLine)
      .where(and(eq(transcriptLine.drawId, drawId), gt(transcriptLine.pick, last)))
      .orderBy(asc(transcriptLine.pick))
      .limit(BATCH)
    if (rows.length === 0) return
    yield utf8(rows.map(({ line }) => `${line}\n`).join(''))
    last = rows.at(-1)?.pick ?? last
  }
}

/** `labels.jsonl` with the labels that are open today. */
export async function labelsOf(db: Database, drawId: string): Promise<Uint8Array> {
  const rows = await db
    .select({ label: openedLabel.label, labelSalt: openedLabel.labelSalt, leaf: openedLabel.leaf })
    .from(openedLabel)
    .where(eq(openedLabel.drawId, drawId))
    .orderBy(asc(openedLabel.firstPick))
  return labelsBytes(rows)
}

/** The locked object of a draw that was read back and found whole; null before that. */
export async function storedArchive(db: Database, slug: string) {
  const [found] = await db
    .select({
      drawId: archive.drawId,
      key: archive.key,
      bytes: archive.bytes,
      sha256: archive.sha256,
      members: archive.members,
      verifiedAt: archive.verifiedAt,
    })
    .from(archive)
    .innerJoin(draw, eq(draw.id, archive.drawId))
    .where(eq(draw.slug, slug))
  return found?.verifiedAt ? found : null
}

/** What `sitemap.xml` lists: draws that are public, newest first. */
export async function publicSlugs(db: Database): Promise<string[]> {
  const rows = await db
    .select({ slug: draw.slug })
    .from(draw)
    .where(isNotNull(draw.openedAt))
    .orderBy(desc(draw.createdAt))
    .limit(49_000)
  return rows.map(({ slug }) => slug)
}
