import type { Actor, Resource } from '#server/http/authorisation/actor.ts'

/** How a person stands towards what a request is about. One person can stand in several ways. */
type Standing = 'anyone' | 'signed-in' | 'organiser' | 'promoter' | 'witness' | 'named-witness' | 'administrator'

/**
 * What a route lets a person do, and who may. This table is the whole of the site's authorisation: an administrator holds
 * no role in an organisation and sees counts and states only; a witness sees and states, nothing else.
 */
export const PERMISSIONS = {
  visit: { for: ['anyone'], write: false },
  'use-account': { for: ['signed-in'], write: false },
  'list-draws': { for: ['organiser', 'promoter', 'witness', 'administrator'], write: false },
  'read-draw': { for: ['organiser', 'promoter', 'named-witness'], write: false },
  'read-entrants': { for: ['organiser', 'promoter'], write: false },
  'read-people': { for: ['organiser', 'promoter'], write: false },
  edit: { for: ['organiser', 'promoter'], write: true },
  run: { for: ['promoter'], write: true },
  'manage-people': { for: ['promoter'], write: true },
  // A witness is independent of the organisation: its suspension does not silence them.
  witness: { for: ['named-witness'], write: false },
  administer: { for: ['administrator'], write: false },
} as const satisfies Record<string, { readonly for: readonly Standing[]; readonly write: boolean }>

export type Permission = keyof typeof PERMISSIONS

/** A route's rule: the permission it needs, and on what. */
export interface Rule {
  readonly permission: Permission
  readonly on: 'site' | 'organisation' | 'draw'
}

export type Decision =
  | { readonly allowed: true }
  | { readonly allowed: false; readonly status: 401 | 403 | 404; readonly reason: string }

const ALLOWED: Decision = { allowed: true }
const refuse = (status: 401 | 403 | 404, reason: string): Decision => ({ allowed: false, status, reason })

/**
 * Whether `actor` may do what `rule` says, to `resource`. A rule on an organisation or a draw needs that resource: null
 * means that there is none such, which is told only to people who are signed in. Somebody who has no standing at all
 * towards a draw learns nothing of it, not even that it exists.
 */
export function decide(rule: Rule, actor: Actor, resource: Resource | null): Decision {
  const permission = PERMISSIONS[rule.permission]
  const entitled: readonly Standing[] = permission.for
  if (entitled.includes('anyone')) return ALLOWED
  if (!actor.person) return refuse(401, 'Sign in to go on.')
  if (rule.on !== 'site' && !resource) return refuse(404, 'There is nothing at this address.')
  const standings = standingsOf(actor, resource)
  if (!entitled.some((standing) => standings.has(standing))) {
    const outsider = standings.size === 2
    if (rule.on === 'draw' && outsider) return refuse(404, 'There is nothing at this address.')
    return refuse(403, refusalOf(rule.permission))
  }
  if (permission.write && resource?.organisation.state === 'suspended') {
    return refuse(403, 'This organisation is suspended: its people can read, but change nothing.')
  }
  if (rule.permission === 'run' && resource?.organisation.state === 'pending') {
    return refuse(403, 'This organisation is not approved yet. Prepare drafts now, and open them once it is approved.')
  }
  return ALLOWED
}

/** The answer for each of several permissions on one resource: what pages show as "may". */
export function permissionsOn<P extends Permission>(
  permissions: readonly P[],
  actor: Actor,
  resource: Resource,
): Record<P, boolean> {
  const on = resource.draw ? 'draw' : 'organisation'
  return Object.fromEntries(
    permissions.map((permission) => [permission, decide({ permission, on }, actor, resource).allowed]),
  ) as Record<P, boolean>
}

/** Whether what this person sees in the office is narrowed to the draws in which they are named as a witness. */
export function seesOnlyWitnessedDraws(actor: Actor, resource: Resource): boolean {
  const standings = standingsOf(actor, resource)
  return !(['organiser', 'promoter', 'administrator'] as const).some((standing) => standings.has(standing))
}

function standingsOf(actor: Actor, resource: Resource | null): Set<Standing> {
  const standings = new Set<Standing>(['anyone'])
  if (!actor.person) return standings
  standings.add('signed-in')
  if (actor.person.administrator) standings.add('administrator')
  if (!resource) return standings
  for (const membership of actor.memberships) {
    if (membership.organisationId === resource.organisation.id) standings.add(membership.role)
  }
  if (resource.draw?.witnesses.includes(actor.person.id)) standings.add('named-witness')
  return standings
}

function refusalOf(permission: Permission): string {
  switch (permission) {
    case 'run':
    case 'manage-people':
      return 'Only a promoter of this organisation can do this. Ask one of them.'
    case 'edit':
    case 'read-entrants':
    case 'read-people':
      return 'Only organisers and promoters of this organisation can do this.'
    case 'read-draw':
      return 'Only organisers, promoters and the witnesses named in this draw can see this.'
    case 'list-draws':
      return 'You have no role in this organisation. Ask one of its promoters to invite you.'
    case 'witness':
      return 'Only a witness named in this draw can do this.'
    case 'administer':
      return 'Only an administrator of the site can do this.'
    default:
      return 'You cannot do this.'
  }
}
