import { sql } from 'drizzle-orm'
import { bigint, check, index, integer, pgTable, primaryKey, text, unique, uuid } from 'drizzle-orm/pg-core'
import { at, bytes } from './columns.ts'
import { draw } from './draw.ts'

/** What is in a seal's bytes, beside them: the same for one that waits and one that counts. */
const sealColumns = () => ({
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
  supersedes: text(),
  reason: text(),
  /** Of a seal that replaces another: entrants whom only the new one has, only the old one, and both, but differently. */
  added: integer(),
  removed: integer(),
  changed: integer(),
})

/**
 * A seal as it was made and signed, with its leaves and secrets. It counts, and stands in `seal`, from the moment that an
 * outside authority has put its timestamp on it; until then it can be discarded with all that belongs to it, and nobody
 * outside has seen it. Never changed.
 */
export const sealing = pgTable(
  'sealing',
  {
    id: bigint({ mode: 'number' }).primaryKey().generatedAlwaysAsIdentity(),
    ...sealColumns(),
    /** Who sealed, and the version of the draw that they saw. */
    actorId: uuid(),
    drawVersion: integer().notNull(),
    madeAt: at().notNull(),
  },
  (t) => [
    index('sealing_draw').on(t.drawId),
    check('sealing_digest', sql`${t.digest} ~ '^[0-9a-f]{64}$' and ${t.digest} = encode(sha256(${t.bytes}), 'hex')`),
    check('sealing_far_enough', sql`${t.drawAt} >= ${t.sealedAt} + interval '120 seconds'`),
    check('sealing_replacement_has_reason', sql`(${t.supersedes} is null) = (${t.reason} is null)`),
    check(
      'sealing_replacement_has_counts',
      sql`(${t.supersedes} is null) = (${t.added} is null) and (${t.added} is null) = (${t.removed} is null) and (${t.added} is null) = (${t.changed} is null)`,
    ),
  ],
)

/** How the waiting for a timestamp goes, for the office; goes with the sealing. */
export const timestamping = pgTable('timestamping', {
  sealingId: bigint({ mode: 'number' })
    .primaryKey()
    .references(() => sealing.id, { onDelete: 'cascade' }),
  tries: integer().notNull(),
  triedAt: at().notNull(),
  /** What the authorities said last. */
  detail: text().notNull(),
})

/** A seal, as published (PROTOCOL section 3), with its timestamp. Append-only. */
export const seal = pgTable(
  'seal',
  {
    id: bigint({ mode: 'number' })
      .primaryKey()
      .references(() => sealing.id),
    ...sealColumns(),
    /** The TimeStampResp over the digest, the time that it states, and whose it is; seals from before timestamps have none. */
    timestamp: bytes(),
    timestampAt: at(),
    timestampAuthority: text(),
  },
  (t) => [
    index('seal_draw').on(t.drawId, t.id),
    unique('seal_supersedes_unique').on(t.supersedes),
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
    check(
      'seal_timestamp_whole',
      sql`(${t.timestamp} is null) = (${t.timestampAt} is null) and (${t.timestamp} is null) = (${t.timestampAuthority} is null)`,
    ),
    check('seal_timestamp_in_time', sql`${t.timestampAt} < ${t.drawAt}`),
  ],
)

/**
 * What only the site knows of a seal, encrypted with AES-256-GCM. A seed is erased unopened when its seal is replaced,
 * or the draw cancelled or failed; and once it is opened, since the result shows it (trigger).
 */
export const sealSecret = pgTable('seal_secret', {
  sealId: bigint({ mode: 'number' })
    .primaryKey()
    .references(() => sealing.id),
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
      .references(() => sealing.id),
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
      .references(() => sealing.id),
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
