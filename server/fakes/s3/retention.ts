import { accessDenied, invalidArgument, invalidRequest } from './s3-error.ts'

/** Object Lock (Amazon S3 user guide, "Locking objects with Object Lock"), as pure rules. */
export interface Retention {
  readonly mode: 'GOVERNANCE' | 'COMPLIANCE'
  /** ISO 8601, UTC. */
  readonly retainUntil: string
}

/** What a bucket gives to objects that ask for nothing else; one of days and years. */
export interface DefaultRetention {
  readonly mode: Retention['mode']
  readonly days?: number
  readonly years?: number
}

export function parseRetention(mode: string | undefined, until: string | undefined, now: Date): Retention | undefined {
  if (mode === undefined && until === undefined) return undefined
  if (mode === undefined || until === undefined)
    throw invalidArgument('x-amz-object-lock-retain-until-date and x-amz-object-lock-mode must both be supplied')
  if (mode !== 'GOVERNANCE' && mode !== 'COMPLIANCE')
    throw invalidArgument('Unknown wormMode directive.', 'x-amz-object-lock-mode', mode)
  const time = /^\d{4}-\d\d-\d\dT/.test(until) ? new Date(until) : new Date(Number.NaN)
  if (Number.isNaN(time.getTime()))
    throw invalidArgument(
      'The retain until date must be provided in ISO 8601 format',
      'x-amz-object-lock-retain-until-date',
      until,
    )
  if (time.getTime() <= now.getTime())
    throw invalidArgument('The retain until date must be in the future!', 'x-amz-object-lock-retain-until-date', until)
  return { mode, retainUntil: time.toISOString() }
}

export function defaultRetentionFrom(rule: DefaultRetention | undefined, now: Date): Retention | undefined {
  if (!rule) return undefined
  const until = new Date(now)
  until.setUTCDate(until.getUTCDate() + (rule.days ?? 0))
  until.setUTCFullYear(until.getUTCFullYear() + (rule.years ?? 0))
  return { mode: rule.mode, retainUntil: until.toISOString() }
}

export function parseDefaultRetention(
  mode: string | undefined,
  days: string | undefined,
  years: string | undefined,
): DefaultRetention {
  if (mode !== 'GOVERNANCE' && mode !== 'COMPLIANCE') throw invalidArgument('Unknown wormMode directive.')
  if ((days === undefined) === (years === undefined))
    throw invalidRequest('A default retention needs either Days or Years.')
  const count = Number(days ?? years)
  if (!Number.isInteger(count) || count < 1 || count > 36500)
    throw invalidArgument('Default retention period must be a positive integer value.')
  return days === undefined ? { mode, years: count } : { mode, days: count }
}

const inForce = (retention: Retention | undefined, now: Date): retention is Retention =>
  retention !== undefined && new Date(retention.retainUntil).getTime() > now.getTime()

const locked = () => accessDenied('Access Denied because object protected by object lock.')

/** Throws AccessDenied where the lock forbids the deletion of this version. */
export function checkDeletion(retention: Retention | undefined, bypassGovernance: boolean, now: Date): void {
  if (inForce(retention, now) && !(retention.mode === 'GOVERNANCE' && bypassGovernance)) throw locked()
}

/** Throws AccessDenied where a lock in force would be shortened, weakened or removed. */
export function checkChange(
  current: Retention | undefined,
  next: Retention | undefined,
  bypassGovernance: boolean,
  now: Date,
): void {
  if (!inForce(current, now)) return
  const longer = next !== undefined && new Date(next.retainUntil).getTime() >= new Date(current.retainUntil).getTime()
  if (longer && (next.mode === current.mode || next.mode === 'COMPLIANCE')) return
  if (current.mode === 'GOVERNANCE' && bypassGovernance) return
  throw locked()
}
