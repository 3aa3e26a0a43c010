import type { Passwords } from '#server/adapters/passwords/passwords.ts'
import type { Config } from '#server/config/config.ts'
import type { EntryGuard } from '#server/http/session/entry-limits.ts'
import type { SignInGuard } from '#server/http/session/sign-in-limits.ts'
import { notFound } from '#server/http/problems.ts'
import type { Services } from '#server/services.ts'

/** What handlers are made with. */
export interface HandlerParts {
  readonly services: Services
  readonly site: Pick<Config, 'origin' | 'local' | 'mailPageUrl'>
  readonly passwords: Passwords
  readonly guard: SignInGuard
  readonly entryGuard: EntryGuard
}

/** The value of a look-up; a Problem of status 404 where it found nothing. */
export function found<T>(value: T | null | undefined): T {
  if (value === null || value === undefined) throw notFound()
  return value
}
