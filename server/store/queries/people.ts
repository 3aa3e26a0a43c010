import { and, asc, eq, gt, isNull, sql } from 'drizzle-orm'
import type { z } from 'zod'
import type { invitationRow, personRow } from '#shared/schemas/api/office.ts'
import type { Role } from '#shared/schemas/values.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { draw, witness } from '#server/store/schema/draw.ts'
import { invitation, membership, organisation, passwordReset, person } from '#server/store/schema/people.ts'
import { instantOf } from '#server/time/instants.ts'
import { tokenHash } from '#server/store/tokens.ts'

type Reading = Pick<Services, 'db' | 'clock'>

export interface SignedInPerson {
  readonly id: string
  readonly name: string
  readonly email: string
  readonly administrator: boolean
  readonly memberships: readonly {
    readonly organisationId: string
    readonly role: Role
    readonly organisation: {
      readonly slug: string
      readonly name: string
      readonly state: string
      readonly timeZone: string
    }
  }[]
}

/** Who is signed in, with their roles; null where the person is gone or disabled. One query. */
export async function findSignedIn(db: Database, personId: string): Promise<SignedInPerson | null> {
  const rows = await db
    .select({ person, membership, organisation })
    .from(person)
    .leftJoin(membership, eq(membership.personId, person.id))
    .leftJoin(organisation, eq(organisation.id, membership.organisationId))
    .where(and(eq(person.id, personId), isNull(person.disabledAt)))
    .orderBy(asc(organisation.name))
  const first = rows[0]
  if (!first) return null
  return {
    id: first.person.id,
    name: first.person.name,
    email: first.person.email,
    administrator: first.person.administrator,
    memberships: rows.flatMap(({ membership: held, organisation: owner }) =>
      held && owner
        ? [
            {
              organisationId: owner.id,
              role: held.role,
              organisation: { slug: owner.slug, name: owner.name, state: owner.state, timeZone: owner.timeZone },
            },
          ]
        : [],
    ),
  }
}

/** The account of an address; null where there is none or it is disabled. For signing in. */
export async function findAccount(
  db: Database,
  email: string,
): Promise<{ readonly id: string; readonly passwordHash: string | null } | null> {
  const [row] = await db
    .select({ id: person.id, passwordHash: person.passwordHash })
    .from(person)
    .where(and(eq(person.email, email.trim().toLowerCase()), isNull(person.disabledAt)))
  return row ?? null
}

/** The password hash of a person who is signed in. */
export async function passwordHashOf(db: Database, personId: string): Promise<string | null> {
  const [row] = await db.select({ hash: person.passwordHash }).from(person).where(eq(person.id, personId))
  return row?.hash ?? null
}

export interface OfficeResource {
  readonly organisation: {
    readonly id: string
    readonly slug: string
    readonly state: 'pending' | 'approved' | 'suspended'
  }
  readonly draw: { readonly id: string; readonly witnesses: readonly string[] } | null
}

/** What rights on an organisation (by its slug) or a draw (by its id) depend on; null where there is none. */
export async function findResource(
  db: Database,
  on: 'organisation' | 'draw',
  key: string,
): Promise<OfficeResource | null> {
  const owner = { id: organisation.id, slug: organisation.slug, state: organisation.state }
  if (on === 'organisation') {
    const [row] = await db.select(owner).from(organisation).where(eq(organisation.slug, key))
    return row ? { organisation: row, draw: null } : null
  }
  const [row] = await db
    .select({
      organisation: owner,
      witnesses: sql<
        (string | null)[]
      >`coalesce((select array_agg(w.person_id::text) from witness w where w.draw_id = ${draw.id} and w.person_id is not null), '{}')`,
    })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .where(eq(draw.id, key))
  if (!row) return null
  return {
    organisation: row.organisation,
    draw: { id: key, witnesses: row.witnesses.filter((id): id is string => id !== null) },
  }
}

/** Whether a person watches any draw of an organisation. */
export async function isWitnessIn(db: Database, personId: string, organisationId: string): Promise<boolean> {
  const [row] = await db
    .select({ id: witness.id })
    .from(witness)
    .innerJoin(draw, eq(draw.id, witness.drawId))
    .where(and(eq(witness.personId, personId), eq(draw.organisationId, organisationId)))
    .limit(1)
  return row !== undefined
}

/** An organisation's people and its open invitations; null where there is no such organisation. */
export async function listPeople(
  { db, clock }: Reading,
  slug: string,
): Promise<{
  readonly organisation: { readonly slug: string; readonly name: string }
  readonly people: z.infer<typeof personRow>[]
  readonly invitations: z.infer<typeof invitationRow>[]
} | null> {
  const [owner] = await db.select().from(organisation).where(eq(organisation.slug, slug))
  if (!owner) return null
  const [people, invitations] = await Promise.all([
    db
      .select({
        id: person.id,
        name: person.name,
        email: person.email,
        role: membership.role,
        since: membership.createdAt,
      })
      .from(membership)
      .innerJoin(person, eq(person.id, membership.personId))
      .where(eq(membership.organisationId, owner.id))
      .orderBy(asc(person.name), asc(person.id)),
    db
      .select()
      .from(invitation)
      .where(
        and(
          eq(invitation.organisationId, owner.id),
          isNull(invitation.acceptedAt),
          isNull(invitation.revokedAt),
          gt(invitation.expiresAt, clock.now()),
        ),
      )
      .orderBy(asc(invitation.sentAt)),
  ])
  return {
    organisation: { slug: owner.slug, name: owner.name },
    people: people.map((row) => ({ ...row, since: instantOf(row.since) })),
    invitations: invitations.map(presentInvitation),
  }
}

export function presentInvitation(row: typeof invitation.$inferSelect): z.infer<typeof invitationRow> {
  return {
    id: row.id,
    email: row.email,
    role: row.role,
    invitedBy: row.invitedByName,
    sentAt: instantOf(row.sentAt),
    expiresAt: instantOf(row.expiresAt),
  }
}

/** One invitation by its id; null where there is none. */
export async function findInvitation(db: Database, id: string): Promise<z.infer<typeof invitationRow> | null> {
  const [row] = await db.select().from(invitation).where(eq(invitation.id, id))
  return row ? presentInvitation(row) : null
}

/** What an invitation's link is for; null where it was used, taken back or is too old. */
export async function getInvitation({ db, clock }: Reading, token: string) {
  const [row] = await db
    .select({ invitation, organisation: organisation.name, known: person.id })
    .from(invitation)
    .innerJoin(organisation, eq(organisation.id, invitation.organisationId))
    .leftJoin(person, and(eq(person.email, invitation.email), sql`${person.passwordHash} is not null`))
    .where(
      and(
        eq(invitation.tokenHash, tokenHash(token)),
        isNull(invitation.acceptedAt),
        isNull(invitation.revokedAt),
        gt(invitation.expiresAt, clock.now()),
      ),
    )
  if (!row) return null
  return {
    organisation: row.organisation,
    role: row.invitation.role,
    email: row.invitation.email,
    invitedBy: row.invitation.invitedByName,
    knownPerson: row.known !== null,
  }
}

/** Whose password a reset link sets; null where it was used or is too old. */
export async function getPasswordReset(
  { db, clock }: Reading,
  token: string,
): Promise<{ readonly email: string } | null> {
  const [row] = await db
    .select({ email: person.email })
    .from(passwordReset)
    .innerJoin(person, eq(person.id, passwordReset.personId))
    .where(
      and(
        eq(passwordReset.tokenHash, tokenHash(token)),
        isNull(passwordReset.usedAt),
        gt(passwordReset.expiresAt, clock.now()),
        isNull(person.disabledAt),
      ),
    )
  return row ?? null
}
