import { sql } from 'drizzle-orm'
import {
  bigint,
  boolean,
  check,
  foreignKey,
  index,
  integer,
  pgTable,
  primaryKey,
  text,
  uuid,
} from 'drizzle-orm/pg-core'
import { at } from './columns.ts'
import { draw } from './draw.ts'
import { entrantPerson } from './entrant.ts'
import { person } from './people.ts'
import { sealedLeaf } from './seal.ts'

/** The entrant to whom access belongs: it goes with their details, when they leave the list or are erased. */
const entrantId = () =>
  bigint({ mode: 'number' })
    .notNull()
    .references(() => entrantPerson.entrantId, { onDelete: 'cascade' })

/** A private link of an entrant. Only the token's SHA-256 is kept; the token itself is in a mail alone. */
export const entryToken = pgTable(
  'entry_token',
  { tokenHash: text().primaryKey(), entrantId: entrantId(), createdAt: at().notNull() },
  (t) => [
    index('entry_token_entrant').on(t.entrantId),
    check('entry_token_hash', sql`${t.tokenHash} ~ '^[0-9a-f]{64}$'`),
  ],
)

/** A code on a printed slip. It is short, so it is kept under a keyed hash, whose key is not in the database. */
export const entryCode = pgTable(
  'entry_code',
  { codeHash: text().primaryKey(), entrantId: entrantId(), createdAt: at().notNull() },
  (t) => [index('entry_code_entrant').on(t.entrantId), check('entry_code_hash', sql`${t.codeHash} ~ '^[0-9a-f]{64}$'`)],
)

/** What an entrant asks to have corrected, and what they were answered. */
export const correctionRequest = pgTable(
  'correction_request',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    entrantId: entrantId(),
    words: text().notNull(),
    /** Asked for once the list was sealed: only the promoter can answer it. */
    afterSeal: boolean().notNull(),
    askedAt: at().notNull(),
    state: text({ enum: ['open', 'done', 'refused'] })
      .notNull()
      .default('open'),
    answer: text(),
    answeredAt: at(),
    answeredBy: uuid().references(() => person.id, { onDelete: 'set null' }),
  },
  (t) => [
    index('correction_request_draw').on(t.drawId, t.id),
    index('correction_request_entrant').on(t.entrantId),
    check('correction_request_state', sql`${t.state} in ('open', 'done', 'refused')`),
    check(
      'correction_request_answered',
      sql`(${t.state} = 'open') = (${t.answer} is null) and (${t.answer} is null) = (${t.answeredAt} is null)`,
    ),
  ],
)

/** A receipt that was opened before its draw, once for each leaf. Only the number of them is ever shown. */
export const receiptOpening = pgTable(
  'receipt_opening',
  { sealId: bigint({ mode: 'number' }).notNull(), leaf: integer().notNull(), at: at().notNull() },
  (t) => [
    primaryKey({ columns: [t.sealId, t.leaf] }),
    foreignKey({ columns: [t.sealId, t.leaf], foreignColumns: [sealedLeaf.sealId, sealedLeaf.leaf] }),
  ],
)
