import { sql } from 'drizzle-orm'
import { bigint, check, index, jsonb, pgTable, text, uuid } from 'drizzle-orm/pg-core'
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
