import { sql } from 'drizzle-orm'
import { bigint, boolean, check, index, integer, pgTable, primaryKey, text, uuid } from 'drizzle-orm/pg-core'
import { at, bytes } from './columns.ts'

/** One mail, once: its key is unique, its Message-ID follows from the key. Holds no address. */
export const mail = pgTable(
  'mail',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    key: text().notNull().unique(),
    kind: text({
      enum: [
        'entry',
        'entry-link',
        'correction',
        'seal',
        'result',
        'won',
        'postponed',
        'cancelled',
        'failed',
        'invitation',
        'password-reset',
      ],
    }).notNull(),
    drawId: uuid(),
    /** For mails to entrants: the leaf whose person it goes to, so that a name is stored once. */
    sealId: bigint({ mode: 'number' }),
    leaf: integer(),
    entrantId: bigint({ mode: 'number' }),
    /** For notices: the log event that they tell of. */
    logIndex: bigint({ mode: 'number' }),
    /** For answers: the request that was answered. */
    correctionId: bigint({ mode: 'number' }),
    messageId: text().notNull().unique(),
    state: text({ enum: ['queued', 'sent', 'failed', 'dropped'] })
      .notNull()
      .default('queued'),
    attempts: integer().notNull().default(0),
    nextAttemptAt: at().notNull(),
    error: text(),
    createdAt: at().notNull(),
    sentAt: at(),
  },
  (t) => [
    index('mail_due').on(t.nextAttemptAt).where(sql`${t.state} = 'queued'`),
    index('mail_draw').on(t.drawId, t.kind, t.state),
    check('mail_state', sql`${t.state} in ('queued', 'sent', 'failed', 'dropped')`),
  ],
)

/** Where a mail goes and what it tells, encrypted; deleted once the mail is sent. */
export const mailContent = pgTable('mail_content', {
  mailId: bigint({ mode: 'number' })
    .primaryKey()
    .references(() => mail.id, { onDelete: 'cascade' }),
  payload: bytes().notNull(),
})

/** When each worker was last alive. */
export const workerHeartbeat = pgTable('worker_heartbeat', {
  id: text().primaryKey(),
  startedAt: at().notNull(),
  seenAt: at().notNull(),
})

/** The last look at each outside service, by the worker: relays, mail, the object store. */
export const serviceCheck = pgTable(
  'service_check',
  {
    service: text({ enum: ['relay', 'mail', 'store', 'timestamp'] }).notNull(),
    address: text().notNull(),
    ok: boolean().notNull(),
    round: bigint({ mode: 'number' }),
    milliseconds: integer(),
    locked: boolean(),
    detail: text().notNull(),
    at: at().notNull(),
  },
  (t) => [primaryKey({ columns: [t.service, t.address] })],
)

/** rate-limiter-flexible's rows. */
export const rateLimit = pgTable('rate_limit', {
  key: text().primaryKey(),
  points: integer().notNull().default(0),
  expire: bigint({ mode: 'number' }),
})
