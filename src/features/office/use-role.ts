import { useQuery } from '@tanstack/react-query'
import { useParams } from 'react-router'
import type { Role } from '#shared/schemas/values.ts'
import { useApp } from '#src/lib/app-context.ts'
import { sessionQuery } from '#src/lib/session.ts'

/** The signed-in person's role in the organisation of this page; null until it is known. What is allowed, the server decides. */
export function useRole(): Role | null {
  const { api } = useApp()
  const slug = useParams().organisation
  const { data } = useQuery(sessionQuery(api))
  return data?.person?.memberships.find(({ organisation }) => organisation.slug === slug)?.role ?? null
}
