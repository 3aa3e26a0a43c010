import { sql } from 'drizzle-orm'
import { bigint, boolean, check, index, integer, jsonb, pgTable, primaryKey, text, uuid } from 'drizzle-orm/pg-core'
import { at, bytes } from './columns.ts'

/** Who did what, append-only and without personal data: people are ids here, their names are in `audit_detail`. */
export const auditEvent = pgTable(
  'audit_event',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    at: at().notNull(),
    action: text().notNull(),
    /** null: the worker, or somebody without an account. */
    actorId: uuid(),
    organisationId: uuid(),
    drawId: uuid(),
    subjectId: text(),
  },
  (t) => [index('audit_event_draw').on(t.drawId, t.id), index('audit_event_organisation').on(t.organisationId, t.id)],
)

/** The words of an audit event: can be erased. */
export const auditDetail = pgTable(
  'audit_detail',
  {
    eventId: bigint({ mode: 'number' })
      .primaryKey()
      .references(() => auditEvent.id),
    actorName: text(),
    sentence: text().notNull(),
    before: jsonb(),
    after: jsonb(),
  },
  (t) => [
    index('audit_detail_words').using(
      'gin',
      sql`lower(${t.sentence} || ' ' || coalesce(${t.actorName}, '')) gin_trgm_ops`,
    ),
  ],
)

/** The site's log (PROTOCOL section 13), append-only; `index` has no gap (trigger). */
export const logEvent = pgTable(
  'log_event',
  {
    index: bigint({ mode: 'number' }).primaryKey(),
    at: at().notNull(),
    event: text().notNull(),
    drawId: uuid(),
    organisationId: uuid(),
    draw: text(),
    organisation: text(),
    digest: text(),
    supersedes: text(),
    /** SHA256(0x07 || salt || text) of the note. */
    note: text(),
    /** The leaf's data: JCS bytes. */
    leaf: bytes().notNull(),
  },
  (t) => [
    index('log_event_draw').on(t.drawId, t.index),
    check(
      'log_event_name',
      sql`${t.event} in ('opened', 'closed', 'sealed', 'replaced', 'postponed', 'cancelled', 'tosses-done', 'drawn', 'failed', 'revealed', 'promoted', 'forfeited', 'substituted', 'withheld', 'suspended', 'restored', 'checkpointed')`,
    ),
  ],
)

/** A public reason and its salt, beside the log; can be taken down. */
export const logNote = pgTable('log_note', {
  logIndex: bigint({ mode: 'number' })
    .primaryKey()
    .references(() => logEvent.index),
  salt: text().notNull(),
  text: text().notNull(),
})

/**
 * Hashes of the log's whole subtrees (RFC 9162 section 2.1.1): node i of level l stands over the leaves i·2^l to
 * (i + 1)·2^l − 1. A trigger adds them with each leaf, so that any proof is a few reads; nothing else can.
 */
export const logNode = pgTable(
  'log_node',
  {
    level: integer().notNull(),
    index: bigint({ mode: 'number' }).notNull(),
    hash: bytes().notNull(),
  },
  (t) => [primaryKey({ columns: [t.level, t.index] }), check('log_node_hash', sql`length(${t.hash}) = 32`)],
)

/** Checkpoints that the site has put into the object store, or is about to. The database compares the root. */
export const logCheckpoint = pgTable(
  'log_checkpoint',
  {
    size: bigint({ mode: 'number' }).primaryKey(),
    root: bytes().notNull(),
    /** The signed note, as it was signed then. */
    note: text().notNull(),
    at: at().notNull(),
    storedAt: at(),
  },
  (t) => [check('log_checkpoint_size', sql`${t.size} >= 1`)],
)

/** A witness's cosignature of a checkpoint (C2SP tlog-cosignature), as the line that a note carries. Append-only. */
export const logCosignature = pgTable(
  'log_cosignature',
  {
    size: bigint({ mode: 'number' }).notNull(),
    /** The witness's key as it is handed on: name, id and key. */
    witness: text().notNull(),
    line: text().notNull(),
    /** The time that it states. */
    at: at().notNull(),
  },
  (t) => [primaryKey({ columns: [t.size, t.witness] })],
)

/** How far each configured witness has followed the log, and what it said last. */
export const logWitness = pgTable('log_witness', {
  witness: text().primaryKey(),
  /** The size of the last checkpoint that it cosigned; 0: none. */
  size: bigint({ mode: 'number' }).notNull().default(0),
  ok: boolean().notNull(),
  detail: text().notNull(),
  triedAt: at().notNull(),
})

/** Every key that the site has signed with, and when. */
export const siteKey = pgTable('site_key', {
  /** SHA-256 of its SubjectPublicKeyInfo DER, hex. */
  fingerprint: text().primaryKey(),
  publicKeyPem: text().notNull(),
  since: at().notNull(),
  /** When another key took its place; null: it signs. */
  until: at(),
})
