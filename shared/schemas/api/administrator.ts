import { z } from 'zod'
import type { Endpoint } from '../endpoint.ts'
import {
  email,
  empty,
  hex32,
  instant,
  line,
  optionalLine,
  organisationState,
  page,
  paged,
  role,
  slug,
  text,
  uuid,
} from '../values.ts'
import { auditEntry, invitationRow, personRow } from './office.ts'

const organisationParams = z.object({ organisation: slug })
export const organisationRow = z.object({
  id: uuid,
  slug,
  name: z.string(),
  registration: z.string().nullable(),
  address: z.string(),
  about: z.string(),
  timeZone: z.string(),
  currency: z.string(),
  state: organisationState,
  demo: z.boolean(),
  people: z.int(),
  draws: z.record(z.string(), z.int()),
  createdAt: instant,
  version: z.int(),
})
export type OrganisationRow = z.infer<typeof organisationRow>

export const organisationInput = z.object({
  name: line(120, 'Name the organisation.'),
  registration: optionalLine(120),
  address: line(200, 'Give its postal address.'),
  about: line(500, 'Say in a sentence what it does.'),
  timeZone: line(60, 'Choose a time zone.'),
  currency: z.string().regex(/^[A-Z]{3}$/, 'Type a currency code of three letters, for example GBP.'),
})

export const listAllOrganisations = {
  name: 'listAllOrganisations',
  method: 'GET',
  path: '/api/administrator/organisations',
  summary: 'Every organisation, with counts and states',
  params: empty,
  query: z.object({
    q: z.string().max(100).default(''),
    state: z.union([organisationState, z.literal('all')]).default('all'),
    page,
  }),
  body: empty,
  response: paged(organisationRow),
} as const satisfies Endpoint
export const createOrganisation = {
  name: 'createOrganisation',
  method: 'POST',
  path: '/api/administrator/organisations',
  summary: 'Make an organisation and invite its first promoter',
  params: empty,
  query: empty,
  body: organisationInput.extend({ promoterEmail: email }),
  response: organisationRow,
} as const satisfies Endpoint
export const getOrganisationForAdministrator = {
  name: 'getOrganisationForAdministrator',
  method: 'GET',
  path: '/api/administrator/organisations/:organisation',
  summary: 'One organisation: people, invitations, counts, no entrants',
  params: organisationParams,
  query: empty,
  body: empty,
  response: z.object({
    organisation: organisationRow,
    people: z.array(personRow),
    invitations: z.array(invitationRow),
  }),
} as const satisfies Endpoint
export const updateOrganisation = {
  name: 'updateOrganisation',
  method: 'PATCH',
  path: '/api/administrator/organisations/:organisation',
  summary: 'Rename or correct an organisation',
  params: organisationParams,
  query: empty,
  body: organisationInput.extend({ version: z.int() }),
  response: organisationRow,
} as const satisfies Endpoint
export const changeOrganisationState = {
  name: 'changeOrganisationState',
  method: 'POST',
  path: '/api/administrator/organisations/:organisation/state',
  summary: 'Approve, suspend or restore, with a public reason for the last two',
  params: organisationParams,
  query: empty,
  body: z.object({
    version: z.int(),
    state: z.enum(['approved', 'suspended']),
    reason: text(500, 'Say why in a sentence: the public reads it.').nullable(),
  }),
  response: organisationRow,
} as const satisfies Endpoint
export const inviteForAdministrator = {
  name: 'inviteForAdministrator',
  method: 'POST',
  path: '/api/administrator/organisations/:organisation/invitations',
  summary: 'Help people back in: invite to a role',
  params: organisationParams,
  query: empty,
  body: z.object({ email, role }),
  response: invitationRow,
} as const satisfies Endpoint
export const sendPasswordReset = {
  name: 'sendPasswordReset',
  method: 'POST',
  path: '/api/administrator/people/:person/password-reset',
  summary: 'Send a person a link to set a new password',
  params: z.object({ person: uuid }),
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint
export const getSiteState = {
  name: 'getSiteState',
  method: 'GET',
  path: '/api/administrator/state',
  summary: 'Jobs, mail, beacon and object store',
  params: empty,
  query: empty,
  body: empty,
  response: z.object({
    now: instant,
    jobs: z.object({
      counts: z.array(z.object({ kind: z.string(), waiting: z.int(), running: z.int(), failed: z.int() })),
      failed: z.array(
        z.object({
          id: z.string(),
          kind: z.string(),
          draw: z.object({ slug, title: z.string() }).nullable(),
          at: instant,
          tries: z.int(),
          error: z.string(),
        }),
      ),
      workerSeenAt: instant.nullable(),
    }),
    mail: z.object({
      queued: z.int(),
      sent: z.int(),
      failed: z.int(),
      lastFailures: z.array(z.object({ at: instant, kind: z.string(), error: z.string() })),
      reachable: z.boolean(),
      detail: z.string(),
    }),
    beacon: z.object({
      network: z.string(),
      relays: z.array(
        z.object({
          address: z.string(),
          ok: z.boolean(),
          round: z.int().nullable(),
          milliseconds: z.int().nullable(),
          detail: z.string(),
        }),
      ),
    }),
    /** Authorities that put timestamps on seals, and seals that wait for one. */
    timestamps: z.object({
      authorities: z.array(
        z.object({ address: z.string(), ok: z.boolean(), milliseconds: z.int().nullable(), detail: z.string() }),
      ),
      waiting: z.int(),
    }),
    /** Outside witnesses of the log; `size`: entries of the last checkpoint that each cosigned. */
    witnesses: z.array(
      z.object({ name: z.string(), address: z.string(), ok: z.boolean(), size: z.int(), detail: z.string() }),
    ),
    store: z.object({
      bucket: z.string(),
      reachable: z.boolean(),
      locked: z.boolean(),
      detail: z.string(),
      archives: z.int(),
      unverified: z.int(),
    }),
    overdue: z.array(z.object({ slug, title: z.string(), drawAt: instant })),
    keyFingerprint: hex32,
    clockErrorSeconds: z.number(),
  }),
} as const satisfies Endpoint
export const retryJob = {
  name: 'retryJob',
  method: 'POST',
  path: '/api/administrator/jobs/:job/retry',
  summary: 'Try a failed job again',
  params: z.object({ job: uuid }),
  query: empty,
  body: empty,
  response: empty,
} as const satisfies Endpoint
export const getAudit = {
  name: 'getAudit',
  method: 'GET',
  path: '/api/administrator/audit',
  summary: 'The audit trail of the site',
  params: empty,
  query: z.object({
    q: z.string().max(100).default(''),
    organisation: z.union([slug, z.literal('')]).default(''),
    page,
  }),
  body: empty,
  response: paged(auditEntry),
} as const satisfies Endpoint
