import { sql } from 'drizzle-orm'
import { boolean, check, index, integer, jsonb, pgTable, text, unique, uniqueIndex, uuid } from 'drizzle-orm/pg-core'
import { at } from './columns.ts'

/** Someone who can sign in. E-mail addresses are kept in lower case. */
export const person = pgTable(
  'person',
  {
    id: uuid().primaryKey().defaultRandom(),
    email: text().notNull().unique(),
    name: text().notNull(),
    passwordHash: text(),
    administrator: boolean().notNull().default(false),
    disabledAt: at(),
    demo: boolean().notNull().default(false),
    createdAt: at().notNull().defaultNow(),
  },
  (t) => [check('person_email_lower_case', sql`${t.email} = lower(${t.email})`)],
)

export const organisation = pgTable(
  'organisation',
  {
    id: uuid().primaryKey().defaultRandom(),
    slug: text().notNull().unique(),
    name: text().notNull(),
    registration: text(),
    address: text().notNull(),
    about: text().notNull(),
    timeZone: text().notNull(),
    currency: text().notNull(),
    state: text({ enum: ['pending', 'approved', 'suspended'] })
      .notNull()
      .default('pending'),
    demo: boolean().notNull().default(false),
    version: integer().notNull().default(1),
    createdAt: at().notNull().defaultNow(),
  },
  (t) => [
    check('organisation_state', sql`${t.state} in ('pending', 'approved', 'suspended')`),
    check('organisation_slug', sql`${t.slug} ~ '^[a-z0-9]+(-[a-z0-9]+)*$' and length(${t.slug}) <= 80`),
    check('organisation_currency', sql`${t.currency} ~ '^[A-Z]{3}$'`),
  ],
)

/** A person's one role in an organisation. An administrator of the site holds none (trigger). */
export const membership = pgTable(
  'membership',
  {
    id: uuid().primaryKey().defaultRandom(),
    organisationId: uuid()
      .notNull()
      .references(() => organisation.id),
    personId: uuid()
      .notNull()
      .references(() => person.id, { onDelete: 'cascade' }),
    role: text({ enum: ['promoter', 'organiser', 'witness'] }).notNull(),
    createdAt: at().notNull().defaultNow(),
  },
  (t) => [
    unique('membership_one_role').on(t.organisationId, t.personId),
    index('membership_person').on(t.personId),
    check('membership_role', sql`${t.role} in ('promoter', 'organiser', 'witness')`),
  ],
)

/** An invitation to a role. Only the token's digest is kept; the token itself is in the mail alone. */
export const invitation = pgTable(
  'invitation',
  {
    id: uuid().primaryKey().defaultRandom(),
    organisationId: uuid()
      .notNull()
      .references(() => organisation.id),
    email: text().notNull(),
    role: text({ enum: ['promoter', 'organiser', 'witness'] }).notNull(),
    tokenHash: text().notNull().unique(),
    invitedBy: uuid().references(() => person.id, { onDelete: 'set null' }),
    invitedByName: text().notNull(),
    sentAt: at().notNull(),
    expiresAt: at().notNull(),
    acceptedAt: at(),
    revokedAt: at(),
  },
  (t) => [
    uniqueIndex('invitation_one_open')
      .on(t.organisationId, t.email)
      .where(sql`${t.acceptedAt} is null and ${t.revokedAt} is null`),
    check('invitation_email_lower_case', sql`${t.email} = lower(${t.email})`),
    check('invitation_role', sql`${t.role} in ('promoter', 'organiser', 'witness')`),
  ],
)

export const passwordReset = pgTable('password_reset', {
  id: uuid().primaryKey().defaultRandom(),
  personId: uuid()
    .notNull()
    .references(() => person.id, { onDelete: 'cascade' }),
  tokenHash: text().notNull().unique(),
  createdAt: at().notNull(),
  expiresAt: at().notNull(),
  usedAt: at(),
})

/** express-session's rows (connect-pg-simple's columns). `sess.personId` is who is signed in. */
export const session = pgTable(
  'session',
  { sid: text().primaryKey(), sess: jsonb().$type<{ personId?: string }>().notNull(), expire: at().notNull() },
  (t) => [index('session_expire').on(t.expire), index('session_person').on(sql`(${t.sess} ->> 'personId')`)],
)
