import { queryOptions } from '@tanstack/react-query'
import {
  getAudit,
  getOrganisationForAdministrator,
  getSiteState,
  listAllOrganisations,
} from '#shared/schemas/api/administrator.ts'
import type { ApiClient, CallInput } from '#shared/schemas/endpoint.ts'

type OrganisationSearch = NonNullable<CallInput<typeof listAllOrganisations>['query']>
type AuditSearch = NonNullable<CallInput<typeof getAudit>['query']>

/** Asked again every ten seconds while the page is open: on a draw night somebody watches it. */
export const siteStateQuery = (api: ApiClient) =>
  queryOptions({
    queryKey: ['administrator', 'state'],
    queryFn: () => api.call(getSiteState),
    refetchInterval: 10_000,
  })

export const organisationsQuery = (api: ApiClient, query: OrganisationSearch) =>
  queryOptions({
    queryKey: ['administrator', 'organisations', query],
    queryFn: () => api.call(listAllOrganisations, { query }),
  })

export const organisationQuery = (api: ApiClient, organisation: string) =>
  queryOptions({
    queryKey: ['administrator', 'organisation', organisation],
    queryFn: () => api.call(getOrganisationForAdministrator, { params: { organisation } }),
  })

export const auditQuery = (api: ApiClient, query: AuditSearch) =>
  queryOptions({ queryKey: ['administrator', 'audit', query], queryFn: () => api.call(getAudit, { query }) })

/** A search out of an address; what the address has wrong falls back to everything, page 1. */
export function organisationSearchFrom(params: URLSearchParams) {
  const { shape } = listAllOrganisations.query
  return {
    q: params.get('q')?.trim().slice(0, 100) ?? '',
    state: shape.state.safeParse(params.get('state') ?? undefined).data ?? 'all',
    page: shape.page.safeParse(params.get('page') ?? undefined).data ?? 1,
  } as const
}

export function auditSearchFrom(params: URLSearchParams) {
  const { shape } = getAudit.query
  return {
    q: params.get('q')?.trim().slice(0, 100) ?? '',
    organisation: shape.organisation.safeParse(params.get('organisation') ?? undefined).data ?? '',
    page: shape.page.safeParse(params.get('page') ?? undefined).data ?? 1,
  } as const
}
