import { sql } from 'drizzle-orm'
import { bigint, check, index, integer, pgTable, primaryKey, text, unique, uuid } from 'drizzle-orm/pg-core'
import { at, bytes } from './columns.ts'
import { draw } from './draw.ts'

/** A seal, as published (PROTOCOL section 3). Append-only. */
export const seal = pgTable(
  'seal',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    drawId: uuid()
      .notNull()
      .references(() => draw.id),
    digest: text().notNull().unique(),
    /** The JCS bytes that are signed, and the 64-byte Ed25519 signature. */
    bytes: bytes().notNull(),
    signature: bytes().notNull(),
    /** terms.txt, whose digest the seal holds. */
    terms: text().notNull(),
    keyFingerprint: text().notNull(),
    root: text().notNull(),
    entrants: integer().notNull(),
    tickets: bigint({ mode: 'number' }).notNull(),
    seedCommit: text().unique(),
    beaconChain: text(),
    beaconRound: bigint({ mode: 'number' }),
    beaconRoundAt: at(),
    sealedAt: at().notNull(),
    drawAt: at().notNull(),
    supersedes: text().unique(),
    reason: text(),
  },
  (t) => [
    index('seal_draw').on(t.drawId, t.id),
    check('seal_digest', sql`${t.digest} ~ '^[0-9a-f]{64}$' and ${t.digest} = encode(sha256(${t.bytes}), 'hex')`),
    check('seal_signature', sql`length(${t.signature}) = 64`),
    check('seal_root', sql`${t.root} ~ '^[0-9a-f]{64}$'`),
    check('seal_limits', sql`${t.entrants} between 1 and 2000000 and ${t.tickets} between 1 and 9007199254740991`),
    check('seal_far_enough', sql`${t.drawAt} >= ${t.sealedAt} + interval '120 seconds'`),
    check('seal_replacement_has_reason', sql`(${t.supersedes} is null) = (${t.reason} is null)`),
    check(
      'seal_beacon_whole',
      sql`(${t.beaconRound} is null) = (${t.beaconChain} is null) and (${t.beaconRound} is null) = (${t.beaconRoundAt} is null)`,
    ),
    check('seal_beacon_not_before_draw', sql`${t.beaconRoundAt} >= ${t.drawAt} and ${t.beaconRound} >= 1`),
  ],
)

/**
 * What only the site knows of a seal, encrypted with AES-256-GCM. A seed is erased unopened when its seal is replaced,
 * or the draw cancelled or failed; and once it is opened, since the result shows it (trigger).
 */
export const sealSecret = pgTable('seal_secret', {
  sealId: bigint({ mode: 'number' })
    .primaryKey()
    .references(() => seal.id),
  seed: bytes(),
  blindingKey: bytes(),
  seedErasedAt: at(),
  blindingKeyErasedAt: at(),
})

/** One leaf of the sealed list, as entries.csv shows it. Append-only, nothing personal. */
export const sealedLeaf = pgTable(
  'sealed_leaf',
  {
    sealId: bigint({ mode: 'number' })
      .notNull()
      .references(() => seal.id),
    leaf: integer().notNull(),
    tickets: bigint({ mode: 'number' }).notNull(),
    entryCommit: bytes().notNull(),
    labelCommit: bytes().notNull(),
    identityCommit: bytes().notNull(),
  },
  (t) => [
    primaryKey({ columns: [t.sealId, t.leaf] }),
    unique('sealed_leaf_commit').on(t.sealId, t.entryCommit),
    check('sealed_leaf_index', sql`${t.leaf} >= 0`),
    check('sealed_leaf_tickets', sql`${t.tickets} between 1 and 4294967295`),
    check(
      'sealed_leaf_lengths',
      sql`length(${t.entryCommit}) = 32 and length(${t.labelCommit}) = 32 and length(${t.identityCommit}) = 32`,
    ),
  ],
)

/** Who stands behind a leaf: what was hashed, and nothing that the record needs. May be erased, never changed. */
export const sealedLeafPerson = pgTable(
  'sealed_leaf_person',
  {
    sealId: bigint({ mode: 'number' })
      .notNull()
      .references(() => seal.id),
    leaf: integer().notNull(),
    entrantId: bigint({ mode: 'number' }).notNull(),
    reference: text().notNull(),
    label: text().notNull(),
    name: text().notNull(),
    contact: text().notNull(),
    numbers: text().notNull(),
    /** Where their mails go; `contact` is what was hashed. */
    email: text(),
  },
  (t) => [
    primaryKey({ columns: [t.sealId, t.leaf] }),
    unique('sealed_leaf_person_reference').on(t.sealId, t.reference),
    index('sealed_leaf_person_entrant').on(t.entrantId),
  ],
)
