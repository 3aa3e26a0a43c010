import { and, asc, between, eq, isNotNull, lt, sql } from 'drizzle-orm'
import { toHex } from '#shared/bytes/hex.ts'
import { entryIsIn } from '#shared/log/log-proof.ts'
import { type DrawLog, LOG_ENTRIES_A_CALL, type LogHead, type LogState } from '#shared/schemas/api/log.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { signedHead } from '#server/store/queries/log-head.ts'
import {
  leafText,
  logConsistencyProof,
  logInclusionProof,
  logRoot,
  logSize,
  provenEntriesOf,
  storedCheckpoint,
} from '#server/store/queries/log-tree.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { seal } from '#server/store/schema/seal.ts'
import { instantOf } from '#server/time/instants.ts'

type Reading = Pick<Services, 'db' | 'clock' | 'sha256' | 'signing' | 'site'>

/** A draw is told to be overdue from so long after its time on, in milliseconds: settling takes some seconds. */
const OVERDUE_AFTER = 60_000

/** The head of the log as it stands, signed. */
export async function logHeadOf(services: Reading): Promise<LogHead> {
  const { head, note } = await signedHead(services.db, services)
  const { fingerprint, publicKey } = services.signing.current
  return {
    origin: head.origin,
    size: head.size,
    root: toHex(head.root),
    note,
    keyFingerprint: fingerprint,
    publicKey: toHex(publicKey),
  }
}

/** The head, the newest checkpoint in the object store, and the sealed draws whose time has come without a result. */
export async function logStateOf(services: Reading): Promise<LogState> {
  const { db } = services
  const [head, kept, overdue] = await Promise.all([logHeadOf(services), storedCheckpoint(db), overdueDraws(services)])
  return { head, kept: kept && { size: kept.size, at: instantOf(kept.at) }, overdue }
}

async function overdueDraws({ db, clock }: Reading): Promise<LogState['overdue']> {
  const rows = await db
    .select({
      slug: draw.slug,
      title: draw.title,
      organisation: { slug: organisation.slug, name: organisation.name },
      drawAt: draw.drawAt,
      seal: seal.digest,
    })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .innerJoin(seal, eq(seal.drawId, draw.id))
    .where(
      and(
        eq(draw.state, 'sealed'),
        lt(draw.drawAt, new Date(clock.now().getTime() - OVERDUE_AFTER)),
        sql`not exists (select from seal r where r.supersedes = ${seal.digest})`,
      ),
    )
    .orderBy(asc(draw.drawAt))
  return rows.map((row) => ({ ...row, drawAt: instantOf(row.drawAt) }))
}

/** Entries with their reasons, from one number to another, both included, and no more than a call may have. */
export async function logEntries(db: Database, input: { readonly from: number; readonly to?: number | undefined }) {
  const last = Math.min(input.to ?? Number.MAX_SAFE_INTEGER, input.from + LOG_ENTRIES_A_CALL - 1)
  const [size, rows] = await Promise.all([
    logSize(db),
    db
      .select({ index: logEvent.index, leaf: logEvent.leaf, salt: logNote.salt, text: logNote.text })
      .from(logEvent)
      .leftJoin(logNote, eq(logNote.logIndex, logEvent.index))
      .where(between(logEvent.index, input.from, last))
      .orderBy(asc(logEvent.index)),
  ])
  return {
    size,
    entries: rows.map(({ index, leaf, salt, text }) => ({
      index,
      leaf: leafText(leaf),
      note: salt === null || text === null ? null : { salt, text },
    })),
  }
}

/** The proof that an entry stands in the log of a size; null where the log has no such entry or size. */
export async function logInclusion({ db, sha256 }: Reading, { index, size }: { index: number; size: number }) {
  if (index >= size || size > (await logSize(db))) return null
  const [rows, path, root] = await Promise.all([
    db.select({ leaf: logEvent.leaf }).from(logEvent).where(eq(logEvent.index, index)),
    logInclusionProof(db, sha256, index, size),
    logRoot(db, sha256, size),
  ])
  const [row] = rows
  return row ? { index, size, leaf: leafText(row.leaf), path: path.map(toHex), root: toHex(root) } : null
}

/** The proof that the log of one size is the beginning of that of another; null where the log has no such sizes. */
export async function logConsistency({ db, sha256 }: Reading, { first, second }: { first: number; second: number }) {
  if (first > second || second > (await logSize(db))) return null
  const [path, firstRoot, secondRoot] = await Promise.all([
    logConsistencyProof(db, sha256, first, second),
    logRoot(db, sha256, first),
    logRoot(db, sha256, second),
  ])
  return { first, second, firstRoot: toHex(firstRoot), secondRoot: toHex(secondRoot), path: path.map(toHex) }
}

/** What the log says of a public draw, proven to the head; null where there is no such draw. Verified before it leaves. */
export async function drawLogOf(services: Reading, slug: string): Promise<DrawLog | null> {
  const { db, sha256 } = services
  const [found] = await db
    .select({ id: draw.id })
    .from(draw)
    .where(and(eq(draw.slug, slug), isNotNull(draw.openedAt)))
  if (!found) return null
  const { head, note } = await signedHead(db, services)
  const entries = await provenEntriesOf(db, sha256, found.id, head.size)
  if (!entries.every((entry) => entryIsIn(sha256, entry, head))) throw new Error(`The log of ${slug} is not sound.`)
  const { fingerprint, publicKey } = services.signing.current
  return {
    head: { ...head, root: toHex(head.root), note, keyFingerprint: fingerprint, publicKey: toHex(publicKey) },
    entries: entries.map(({ index, text, path }) => ({ index, leaf: text, path: path.map(toHex) })),
  }
}
