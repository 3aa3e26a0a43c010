import { queryOptions } from '@tanstack/react-query'
import { redirect } from 'react-router'
import { getSession, type SessionView } from '#shared/schemas/api/session.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { load } from './loading.ts'

export const sessionQuery = (api: ApiClient) =>
  queryOptions({ queryKey: ['session'], queryFn: () => api.call(getSession), staleTime: 30_000 })

export type SignedIn = SessionView & { readonly person: NonNullable<SessionView['person']> }

/** For loaders of signed-in pages: who it is, or a redirect to the sign-in page that leads back here. */
export async function requireSession(args: {
  readonly context: unknown
  readonly request: Request
}): Promise<SignedIn> {
  const session = await load(args, sessionQuery)
  if (!session.person) {
    const { pathname, search } = new URL(args.request.url)
    throw redirect(`/sign-in?next=${encodeURIComponent(pathname + search)}`)
  }
  return { ...session, person: session.person }
}

/** Where a person's work is: an administrator's pages, else the office. */
export function homeOf(person: SignedIn['person']): string {
  return person.administrator ? '/admin' : '/office'
}

/** Only an address of this site is followed after signing in: a path, never `//host` or a backslash in its guise. */
export function safeNext(next: string | null): string | null {
  return next !== null && /^\/(?![/\\])[^\\\s]*$/.test(next) ? next : null
}
