import { sql } from 'drizzle-orm'
import { bigint, boolean, check, integer, jsonb, pgTable, primaryKey, text, unique, uuid } from 'drizzle-orm/pg-core'
import { at, bytes } from './columns.ts'
import { draw } from './draw.ts'
import { seal } from './seal.ts'

/** The result of a draw, as published (PROTOCOL section 8). One a draw, for ever. */
export const result = pgTable(
  'result',
  {
    drawId: uuid()
      .primaryKey()
      .references(() => draw.id),
    sealId: bigint({ mode: 'number' })
      .notNull()
      .unique()
      .references(() => seal.id),
    digest: text().notNull().unique(),
    bytes: bytes().notNull(),
    signature: bytes().notNull(),
    transcriptDigest: text().notNull(),
    drawnAt: at().notNull(),
    drawKey: text(),
    seed: text(),
    beaconSignature: text(),
    beaconRandomness: text(),
    picks: integer().notNull(),
  },
  (t) => [
    check('result_digest', sql`${t.digest} ~ '^[0-9a-f]{64}$' and ${t.digest} = encode(sha256(${t.bytes}), 'hex')`),
    check('result_signature', sql`length(${t.signature}) = 64`),
    check('result_picks', sql`${t.picks} between 1 and 100000`),
  ],
)

export const resultPick = pgTable(
  'result_pick',
  {
    drawId: uuid()
      .notNull()
      .references(() => result.drawId),
    pick: integer().notNull(),
    leaf: integer().notNull(),
    /** A prize's code and item, or a reserve's number. */
    prize: text(),
    item: integer(),
    reserve: integer(),
    /** The leaf's tickets still in at this pick, and all tickets still in. */
    ticketsIn: bigint({ mode: 'number' }).notNull(),
    remaining: bigint({ mode: 'number' }).notNull(),
  },
  (t) => [
    primaryKey({ columns: [t.drawId, t.pick] }),
    unique('result_pick_award').on(t.drawId, t.prize, t.item),
    unique('result_pick_reserve').on(t.drawId, t.reserve),
    check(
      'result_pick_one_award',
      sql`(${t.prize} is null) = (${t.item} is null) and (${t.prize} is null) <> (${t.reserve} is null)`,
    ),
  ],
)

/** One line of transcript.jsonl, without its line feed. */
export const transcriptLine = pgTable(
  'transcript_line',
  {
    drawId: uuid()
      .notNull()
      .references(() => result.drawId),
    pick: integer().notNull(),
    line: text().notNull(),
  },
  (t) => [primaryKey({ columns: [t.drawId, t.pick] })],
)

/** A label that is open to the public today. Deleted when it is withdrawn; the record stands without it. */
export const openedLabel = pgTable(
  'opened_label',
  {
    drawId: uuid()
      .notNull()
      .references(() => result.drawId),
    leaf: integer().notNull(),
    firstPick: integer().notNull(),
    label: text().notNull(),
    labelSalt: text().notNull(),
  },
  (t) => [primaryKey({ columns: [t.drawId, t.leaf] })],
)

/** The locked object that holds a draw's proof for good. */
export const archive = pgTable('archive', {
  drawId: uuid()
    .primaryKey()
    .references(() => draw.id),
  key: text().notNull().unique(),
  bytes: bigint({ mode: 'number' }).notNull(),
  sha256: text().notNull(),
  /** SHA-256 of each member, in hex: what SHA256SUMS of the public archive is made of. */
  members: jsonb().$type<Record<string, string>>().notNull(),
  lockedUntil: at(),
  /** When the object was read back and found equal. */
  verifiedAt: at(),
  createdAt: at().notNull(),
})

/** Why a due draw is not settled yet; one row a draw, deleted never, so that the page can say since when. */
export const settling = pgTable('settling', {
  drawId: uuid()
    .primaryKey()
    .references(() => draw.id),
  waiting: text({ enum: ['beacon-not-yet', 'beacon-unreachable', 'settling'] }).notNull(),
  since: at().notNull(),
  triedAt: at().notNull(),
  tries: integer().notNull().default(1),
  detail: text().notNull().default(''),
  done: boolean().notNull().default(false),
})

/** A beacon round that was fetched and verified. */
export const beaconObservation = pgTable(
  'beacon_observation',
  {
    chain: text().notNull(),
    round: bigint({ mode: 'number' }).notNull(),
    signature: text().notNull(),
    randomness: text().notNull(),
    relay: text().notNull(),
    fetchedAt: at().notNull(),
  },
  (t) => [primaryKey({ columns: [t.chain, t.round] })],
)
