import { describe, expect, it } from 'vitest'
import { type Actor, NOBODY, type Resource } from '#server/http/authorisation/actor.ts'
import { decide, type Permission, PERMISSIONS, permissionsOn } from '#server/http/authorisation/decide.ts'

const OURS = 'organisation-1'
const person = (id: string, administrator = false) => ({ id, name: id, email: `${id}@group.example`, administrator })
const member = (role: 'organiser' | 'promoter' | 'witness', organisationId = OURS): Actor => ({
  person: person(role),
  memberships: [{ organisationId, role }],
})

const roles: Record<string, Actor> = {
  anonymous: NOBODY,
  'without a role': { person: person('nobody'), memberships: [] },
  organiser: member('organiser'),
  promoter: member('promoter'),
  'witness of the organisation': member('witness'),
  'named witness': { person: person('named'), memberships: [] },
  'promoter of another organisation': member('promoter', 'organisation-2'),
  administrator: { person: person('administrator', true), memberships: [] },
}

const draw = (state: Resource['organisation']['state']): Resource => ({
  organisation: { id: OURS, slug: 'ours', state },
  draw: { id: 'draw-1', witnesses: ['named'] },
})

const answer = (
  permission: Permission,
  actor: Actor,
  resource: Resource | null,
  on: 'draw' | 'organisation' = 'draw',
) => {
  const decision = decide({ permission, on }, actor, resource)
  return decision.allowed ? 200 : decision.status
}

/** The may-table of the product, spelt out by hand: role, then each permission on a draw of an approved organisation. */
const table: Record<string, Partial<Record<Permission, number>>> = {
  anonymous: {
    visit: 200,
    'list-draws': 401,
    'read-draw': 401,
    'read-entrants': 401,
    edit: 401,
    run: 401,
    witness: 401,
    administer: 401,
  },
  'without a role': {
    visit: 200,
    'list-draws': 404,
    'read-draw': 404,
    'read-entrants': 404,
    edit: 404,
    run: 404,
    witness: 404,
    administer: 404,
  },
  organiser: {
    visit: 200,
    'list-draws': 200,
    'read-draw': 200,
    'read-entrants': 200,
    edit: 200,
    run: 403,
    witness: 403,
    administer: 403,
  },
  promoter: {
    visit: 200,
    'list-draws': 200,
    'read-draw': 200,
    'read-entrants': 200,
    edit: 200,
    run: 200,
    witness: 403,
    administer: 403,
  },
  'witness of the organisation': {
    visit: 200,
    'list-draws': 200,
    'read-draw': 403,
    'read-entrants': 403,
    edit: 403,
    run: 403,
    witness: 403,
    administer: 403,
  },
  'named witness': {
    visit: 200,
    'list-draws': 403,
    'read-draw': 200,
    'read-entrants': 403,
    edit: 403,
    run: 403,
    witness: 200,
    administer: 403,
  },
  'promoter of another organisation': {
    visit: 200,
    'list-draws': 404,
    'read-draw': 404,
    'read-entrants': 404,
    edit: 404,
    run: 404,
    witness: 404,
    administer: 404,
  },
  administrator: {
    visit: 200,
    'list-draws': 200,
    'read-draw': 403,
    'read-entrants': 403,
    edit: 403,
    run: 403,
    witness: 403,
    administer: 200,
  },
}

describe('decide', () => {
  for (const [role, expected] of Object.entries(table)) {
    it(`gives ${role} exactly what the may-table says`, () => {
      const actor = roles[role] as Actor
      const found = Object.fromEntries(
        Object.keys(expected).map((permission) => [
          permission,
          answer(permission as Permission, actor, draw('approved')),
        ]),
      )
      expect(found).toEqual(expected)
    })
  }

  it('lets people of a suspended organisation read and not write, and its witnesses speak', () => {
    for (const role of ['organiser', 'promoter']) {
      const actor = roles[role] as Actor
      expect(answer('read-entrants', actor, draw('suspended'))).toBe(200)
      expect(answer('edit', actor, draw('suspended'))).toBe(403)
      expect(answer('run', actor, draw('suspended'))).toBe(403)
      expect(answer('manage-people', actor, draw('suspended'), 'organisation')).toBe(403)
    }
    expect(answer('witness', roles['named witness'] as Actor, draw('suspended'))).toBe(200)
  })

  it('lets people of an organisation that is not approved yet prepare, and not open', () => {
    const promoter = roles.promoter as Actor
    expect(answer('edit', promoter, draw('pending'))).toBe(200)
    expect(answer('run', promoter, draw('pending'))).toBe(403)
  })

  it('says that there is nothing where there is no such draw, and asks strangers to sign in first', () => {
    for (const [role, actor] of Object.entries(roles)) {
      expect(answer('edit', actor, null)).toBe(role === 'anonymous' ? 401 : 404)
    }
  })

  it('gives pages the same answers as routes', () => {
    const all = Object.keys(PERMISSIONS) as Permission[]
    for (const actor of Object.values(roles)) {
      for (const state of ['pending', 'approved', 'suspended'] as const) {
        const flags = permissionsOn(all, actor, draw(state))
        for (const permission of all) expect(flags[permission]).toBe(answer(permission, actor, draw(state)) === 200)
      }
    }
  })
})
