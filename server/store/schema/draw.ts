import { sql } from 'drizzle-orm'
import { bigint, boolean, check, index, integer, pgTable, text, unique, uuid } from 'drizzle-orm/pg-core'
import { at } from './columns.ts'
import { organisation, person } from './people.ts'

/**
 * One draw. Its state moves only along PRODUCT.md's "A draw's life" (trigger); once sealed nothing in it changes but
 * the state and, under a new seal, the draw time (trigger).
 */
export const draw = pgTable(
  'draw',
  {
    id: uuid().primaryKey().defaultRandom(),
    organisationId: uuid()
      .notNull()
      .references(() => organisation.id),
    slug: text().notNull().unique(),
    title: text().notNull(),
    goodCause: text().notNull(),
    promoterName: text().notNull(),
    promoterAddress: text().notNull(),
    licence: text(),
    ticketPriceMinor: bigint({ mode: 'number' }),
    ticketPriceCurrency: text(),
    minimumAge: integer(),
    terms: text().notNull(),
    timeZone: text().notNull(),
    closesAt: at().notNull(),
    drawAt: at().notNull(),
    rule: text({ enum: ['one-prize-each', 'every-ticket'] }).notNull(),
    reserves: integer().notNull(),
    state: text({ enum: ['draft', 'open', 'closed', 'sealed', 'drawn', 'concluded', 'cancelled', 'failed'] })
      .notNull()
      .default('draft'),
    openedAt: at(),
    closedAt: at(),
    sealedAt: at(),
    drawnAt: at(),
    endedAt: at(),
    /** Kept by triggers, so that no page counts a million rows. */
    entrantCount: integer().notNull().default(0),
    ticketCount: bigint({ mode: 'number' }).notNull().default(0),
    demo: boolean().notNull().default(false),
    version: integer().notNull().default(1),
    createdAt: at().notNull().defaultNow(),
  },
  (t) => [
    check('draw_slug', sql`${t.slug} ~ '^[a-z0-9]+(-[a-z0-9]+)*$' and length(${t.slug}) <= 80`),
    check(
      'draw_state',
      sql`${t.state} in ('draft', 'open', 'closed', 'sealed', 'drawn', 'concluded', 'cancelled', 'failed')`,
    ),
    check('draw_rule', sql`${t.rule} in ('one-prize-each', 'every-ticket')`),
    check('draw_reserves', sql`${t.reserves} between 0 and 100000`),
    check('draw_minimum_age', sql`${t.minimumAge} between 0 and 120`),
    check('draw_times_in_order', sql`${t.closesAt} <= ${t.drawAt}`),
    check('draw_times_whole_seconds', sql`date_trunc('second', ${t.drawAt}) = ${t.drawAt}`),
    check(
      'draw_ticket_price',
      sql`(${t.ticketPriceMinor} is null) = (${t.ticketPriceCurrency} is null) and ${t.ticketPriceMinor} >= 0`,
    ),
    check('draw_ticket_price_currency', sql`${t.ticketPriceCurrency} ~ '^[A-Z]{3}$'`),
    check('draw_tickets', sql`${t.ticketCount} between 0 and 9007199254740991`),
    check('draw_entrants', sql`${t.entrantCount} between 0 and 2000000`),
    check('draw_opened', sql`${t.state} in ('draft', 'cancelled') or ${t.openedAt} is not null`),
    check(
      'draw_sealed',
      sql`${t.state} not in ('sealed', 'drawn', 'concluded', 'failed') or ${t.sealedAt} is not null`,
    ),
    check('draw_drawn', sql`(${t.state} in ('drawn', 'concluded')) = (${t.drawnAt} is not null)`),
    index('draw_organisation').on(t.organisationId, t.createdAt),
    index('draw_state_closes').on(t.state, t.closesAt),
    index('draw_state_draw_at').on(t.state, t.drawAt),
    index('draw_title_words').using('gin', sql`lower(${t.title}) gin_trgm_ops`),
  ],
)

export const prize = pgTable(
  'prize',
  {
    id: uuid().primaryKey().defaultRandom(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    /** Stable id in the record: p1, p2, … */
    code: text().notNull(),
    /** From 1, in the order in which they are drawn. Its unique constraint is deferrable (hand-written migration). */
    position: integer().notNull(),
    name: text().notNull(),
    quantity: integer().notNull(),
    donor: text(),
    description: text(),
    valueMinor: bigint({ mode: 'number' }),
    valueCurrency: text(),
  },
  (t) => [
    unique('prize_code').on(t.drawId, t.code),
    check('prize_code_form', sql`${t.code} ~ '^p[1-9][0-9]*$'`),
    check('prize_position_from_one', sql`${t.position} >= 1`),
    check('prize_quantity', sql`${t.quantity} between 1 and 100000`),
    check('prize_value', sql`(${t.valueMinor} is null) = (${t.valueCurrency} is null) and ${t.valueMinor} >= 0`),
  ],
)

/** Someone independent who watches one draw. */
export const witness = pgTable(
  'witness',
  {
    id: uuid().primaryKey().defaultRandom(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    personId: uuid().references(() => person.id, { onDelete: 'set null' }),
    name: text().notNull(),
    role: text().notNull(),
    connection: text().notNull(),
    createdAt: at().notNull().defaultNow(),
  },
  (t) => [index('witness_draw').on(t.drawId), unique('witness_person_once').on(t.drawId, t.personId)],
)

/** What a witness confirmed or refused. Append-only; the words stand apart, so that they can be taken down. */
export const witnessStatement = pgTable(
  'witness_statement',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    witnessId: uuid()
      .notNull()
      .references(() => witness.id),
    about: text({ enum: ['seal', 'result'] }).notNull(),
    verdict: text({ enum: ['confirmed', 'refused'] }).notNull(),
    digest: text().notNull(),
    at: at().notNull(),
  },
  (t) => [
    unique('witness_statement_once').on(t.witnessId, t.digest),
    index('witness_statement_draw').on(t.drawId),
    check('witness_statement_about', sql`${t.about} in ('seal', 'result')`),
    check('witness_statement_verdict', sql`${t.verdict} in ('confirmed', 'refused')`),
    check('witness_statement_digest', sql`${t.digest} ~ '^[0-9a-f]{64}$'`),
  ],
)

export const witnessWords = pgTable('witness_words', {
  statementId: bigint({ mode: 'number' })
    .primaryKey()
    .references(() => witnessStatement.id),
  words: text().notNull(),
})
