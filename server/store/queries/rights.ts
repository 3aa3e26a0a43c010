import { eq, sql } from 'drizzle-orm'
import type { Role } from '#shared/schemas/values.ts'
import type { Database } from '../database.ts'
import { draw, witness } from '../schema/draw.ts'
import { membership, organisation, person } from '../schema/people.ts'

/** A person who may sign in, with their roles as they are now. */
export interface PersonWithRoles {
  readonly person: {
    readonly id: string
    readonly name: string
    readonly email: string
    readonly administrator: boolean
  }
  readonly memberships: readonly { readonly organisationId: string; readonly role: Role }[]
}

/** null for an id that nobody has, and for a person who is disabled. */
export async function personWithRoles(db: Database, personId: string): Promise<PersonWithRoles | null> {
  const rows = await db
    .select({
      id: person.id,
      name: person.name,
      email: person.email,
      administrator: person.administrator,
      disabledAt: person.disabledAt,
      organisationId: membership.organisationId,
      role: membership.role,
    })
    .from(person)
    .leftJoin(membership, eq(membership.personId, person.id))
    .where(eq(person.id, personId))
  const first = rows[0]
  if (!first || first.disabledAt) return null
  const { id, name, email, administrator } = first
  return {
    person: { id, name, email, administrator },
    memberships: rows.flatMap(({ organisationId, role }) => (organisationId && role ? [{ organisationId, role }] : [])),
  }
}

/** What rights on an organisation depend on; null where there is none of this slug. */
export async function rightsOnOrganisation(db: Database, slug: string) {
  const [found] = await db
    .select({ id: organisation.id, slug: organisation.slug, state: organisation.state })
    .from(organisation)
    .where(eq(organisation.slug, slug))
  return found ? { organisation: found, draw: null } : null
}

/** What rights on a draw depend on: its organisation's state, and who is named as its witness. */
export async function rightsOnDraw(db: Database, drawId: string) {
  const [found] = await db
    .select({
      id: draw.id,
      organisationId: organisation.id,
      slug: organisation.slug,
      state: organisation.state,
      witnesses: sql<string[]>`coalesce(
        (select array_agg(${witness.personId}::text) from ${witness}
          where ${witness.drawId} = ${draw.id} and ${witness.personId} is not null), '{}')`,
    })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .where(eq(draw.id, drawId))
  if (!found) return null
  return {
    organisation: { id: found.organisationId, slug: found.slug, state: found.state },
    draw: { id: found.id, witnesses: found.witnesses },
  }
}
