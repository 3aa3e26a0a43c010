import { createHash } from 'node:crypto'
import type { Pool } from 'pg'
import { RateLimiterPostgres, RateLimiterRes } from 'rate-limiter-flexible'
import type { Problem } from '#shared/schemas/problem.ts'
import { problem } from '#server/http/problems.ts'

/** How many tries in how many seconds. */
export interface Limit {
  readonly tries: number
  readonly seconds: number
}

export interface SignInLimits {
  /** Failed tries from one network address, over all accounts. */
  readonly byAddress: Limit
  /** Failed tries at one account, over all addresses. */
  readonly byAccount: Limit
  /** Mails with a reset link to one account, and asked for from one address. */
  readonly resets: Limit
  /** Tries at invitation and reset tokens from one address. */
  readonly tokens: Limit
}

export const DEFAULT_LIMITS: SignInLimits = {
  byAddress: { tries: 30, seconds: 15 * 60 },
  byAccount: { tries: 8, seconds: 15 * 60 },
  resets: { tries: 5, seconds: 60 * 60 },
  tokens: { tries: 40, seconds: 15 * 60 },
}

/** Counts tries in PostgreSQL, so that every process of the site counts together. */
export interface SignInGuard {
  /** Counts one try before its password is looked at. Throws a 429 Problem where there were too many. */
  beforeSignIn(address: string, account: string): Promise<void>
  /** A right password takes its try back, and forgets the account's earlier ones. */
  afterSuccess(address: string, account: string): Promise<void>
  beforeReset(address: string, account: string): Promise<void>
  beforeToken(address: string): Promise<void>
}

export function createSignInGuard(pool: Pool, limits: SignInLimits = DEFAULT_LIMITS): SignInGuard {
  const limiter = (prefix: string, limit: Limit) => createLimiter(pool, prefix, limit)
  const address = limiter('sign-in-address', limits.byAddress)
  const account = limiter('sign-in-account', limits.byAccount)
  const resetAccount = limiter('reset-account', limits.resets)
  const resetAddress = limiter('reset-address', { ...limits.resets, tries: limits.resets.tries * 4 })
  const token = limiter('token', limits.tokens)
  return {
    async beforeSignIn(from, to) {
      await count(address, hashed(from), 'There were too many tries to sign in from your network.')
      await count(account, hashed(to), 'There were too many tries to sign in to this account.')
    },
    async afterSuccess(from, to) {
      await address.reward(hashed(from))
      await account.delete(hashed(to))
    },
    async beforeReset(from, to) {
      await count(resetAddress, hashed(from), 'Too many reset links were asked for from your network.')
      await count(
        resetAccount,
        hashed(to),
        'Several reset links were sent to this address already: look among your mail.',
      )
    },
    beforeToken: (from) => count(token, hashed(from), 'Too many links were tried from your network.'),
  }
}

/** A count in the table of counts: so many tries in so many seconds for each key. */
export function createLimiter(pool: Pool, prefix: string, limit: Limit): RateLimiterPostgres {
  return new RateLimiterPostgres({
    storeClient: pool,
    storeType: 'pool',
    tableName: 'rate_limit',
    tableCreated: true,
    keyPrefix: prefix,
    points: limit.tries,
    duration: limit.seconds,
    clearExpiredByTimeout: false,
  })
}

/** The wait that a refused try was told, in whole seconds: the `Retry-After` of its response (RFC 9110, 10.2.3). */
const waits = new WeakMap<Problem, number>()
export const retryAfter = (refusal: Problem): number | null => waits.get(refusal) ?? null

/** Counts one try. Throws a 429 Problem with this sentence and the wait where there were too many. */
export async function count(limiter: RateLimiterPostgres, key: string, sentence: string): Promise<void> {
  try {
    await limiter.consume(key)
  } catch (refused) {
    if (!(refused instanceof RateLimiterRes)) throw refused
    const seconds = Math.max(1, Math.ceil(refused.msBeforeNext / 1000))
    const minutes = Math.ceil(seconds / 60)
    const wait = minutes === 1 ? 'a minute' : `${minutes} minutes`
    const refusal = problem(429, `${sentence} Wait ${wait} and try again.`, { code: 'too-many-tries' })
    waits.set(refusal, seconds)
    throw refusal
  }
}

/** Addresses of people and of their machines do not lie about in the table of counts. */
export function hashed(text: string): string {
  return createHash('sha256').update(text.trim().toLowerCase()).digest('base64url').slice(0, 22)
}
