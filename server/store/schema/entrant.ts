import { sql } from 'drizzle-orm'
import {
  bigint,
  check,
  foreignKey,
  index,
  integer,
  jsonb,
  pgTable,
  primaryKey,
  text,
  unique,
  uuid,
} from 'drizzle-orm/pg-core'
import { at, numberRange } from './columns.ts'
import { draw } from './draw.ts'
import { person } from './people.ts'

/** One entrant of a draw: a ticket count and a stable code, nothing about the person. */
export const entrant = pgTable(
  'entrant',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedByDefaultAsIdentity(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    /** For letters and help; not the reference of a seal, and in no record. */
    code: text().notNull(),
    tickets: bigint({ mode: 'number' }).notNull(),
    source: text({ enum: ['import', 'by-hand'] }).notNull(),
    importId: uuid().references(() => entrantImport.id),
    addedAt: at().notNull(),
    version: integer().notNull().default(1),
  },
  (t) => [
    unique('entrant_code').on(t.drawId, t.code),
    unique('entrant_of_draw').on(t.drawId, t.id),
    index('entrant_by_tickets').on(t.drawId, t.tickets, t.id),
    check('entrant_tickets', sql`${t.tickets} between 1 and 4294967295`),
    check('entrant_code_form', sql`${t.code} ~ '^[23456789ABCDEFGHJKLMNPQRSTUVWXYZ]{8,64}$'`),
  ],
)

/** Who the entrant is. Can be erased without touching anything that is sealed. */
export const entrantPerson = pgTable(
  'entrant_person',
  {
    entrantId: bigint({ mode: 'number' }).primaryKey(),
    drawId: uuid().notNull(),
    name: text().notNull(),
    label: text().notNull(),
    email: text(),
    phone: text(),
    numbers: text(),
    /** How the entrant chose to be announced: by the organiser's label, by initials, or by their stable code alone. */
    announced: text({ enum: ['label', 'initials', 'code'] })
      .notNull()
      .default('label'),
    /** The organiser's label, while the entrant chose another: `label` is always the words that count. */
    givenLabel: text(),
  },
  (t) => [
    check('entrant_person_announced', sql`${t.announced} in ('label', 'initials', 'code')`),
    check('entrant_person_given_label', sql`(${t.announced} = 'label') = (${t.givenLabel} is null)`),
    index('entrant_person_by_email').on(sql`lower(${t.email})`).where(sql`${t.email} is not null`),
    foreignKey({ columns: [t.drawId, t.entrantId], foreignColumns: [entrant.drawId, entrant.id] }).onDelete('cascade'),
    index('entrant_person_by_name').on(t.drawId, sql`lower(${t.name})`, t.entrantId),
    index('entrant_person_by_label').on(t.drawId, sql`lower(${t.label})`, t.entrantId),
    index('entrant_person_words').using(
      'gin',
      sql`lower(${t.name} || ' ' || ${t.label} || ' ' || coalesce(${t.email}, '') || ' ' || coalesce(${t.phone}, '') || ' ' || coalesce(${t.numbers}, '')) gin_trgm_ops`,
    ),
    index('entrant_person_with_email').on(t.drawId).where(sql`${t.email} is not null`),
  ],
)

/** The organiser's own ticket numbers; an exclusion constraint keeps each number from being held twice in a draw. */
export const entrantNumbers = pgTable(
  'entrant_numbers',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    drawId: uuid().notNull(),
    entrantId: bigint({ mode: 'number' }).notNull(),
    /** The letters before the digits, for books whose numbers have some; empty where there are none. */
    series: text().notNull().default(''),
    range: numberRange().notNull(),
  },
  (t) => [
    foreignKey({ columns: [t.drawId, t.entrantId], foreignColumns: [entrant.drawId, entrant.id] }).onDelete('cascade'),
    index('entrant_numbers_entrant').on(t.entrantId),
  ],
)

/** One uploaded CSV, from its first byte to its being applied or thrown away. */
export const entrantImport = pgTable(
  'entrant_import',
  {
    id: uuid().primaryKey().defaultRandom(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    fileName: text().notNull(),
    state: text({ enum: ['reading', 'ready', 'faulty', 'applying', 'applied', 'discarded', 'failed'] })
      .notNull()
      .default('reading'),
    bytesRead: bigint({ mode: 'number' }).notNull().default(0),
    bytesTotal: bigint({ mode: 'number' }).notNull(),
    rows: integer().notNull().default(0),
    entrants: integer().notNull().default(0),
    tickets: bigint({ mode: 'number' }).notNull().default(0),
    errorCount: integer().notNull().default(0),
    errors: jsonb().$type<{ row: number; column: string | null; message: string }[]>().notNull().default([]),
    ignoredColumns: jsonb().$type<string[]>().notNull().default([]),
    failure: text(),
    createdBy: uuid().references(() => person.id, { onDelete: 'set null' }),
    createdAt: at().notNull(),
    touchedAt: at().notNull(),
  },
  (t) => [
    index('entrant_import_draw').on(t.drawId, t.createdAt),
    check(
      'entrant_import_state',
      sql`${t.state} in ('reading', 'ready', 'faulty', 'applying', 'applied', 'discarded', 'failed')`,
    ),
  ],
)

/** The rows of an upload, until it is applied or thrown away. */
export const importRow = pgTable(
  'import_row',
  {
    importId: uuid()
      .notNull()
      .references(() => entrantImport.id, { onDelete: 'cascade' }),
    /** Of the file; the header is row 1. */
    row: integer().notNull(),
    name: text().notNull(),
    tickets: bigint({ mode: 'number' }).notNull(),
    label: text().notNull(),
    email: text(),
    phone: text(),
    numbers: text(),
    ranges: jsonb().$type<{ series: string; from: number; to: number }[]>().notNull(),
  },
  (t) => [primaryKey({ columns: [t.importId, t.row] })],
)
