import type { Pool } from 'pg'
import { count, createLimiter, hashed, type Limit } from '#server/http/session/sign-in-limits.ts'

export interface EntryLimits {
  /** Links and codes that fit nobody, tried from one network address. */
  readonly byAddress: Limit
  /** Codes that fit nobody, over all addresses: a code has 60 bits, so that nobody comes to one by trying. */
  readonly codes: Limit
  /** Requests for links from one network address, for one e-mail address, and over all. */
  readonly linksByAddress: Limit
  readonly linksByMail: Limit
  readonly links: Limit
  /** Words and choices that entrants send, from one network address. */
  readonly writes: Limit
}

const QUARTER = 15 * 60
const HOUR = 60 * 60

export const DEFAULT_ENTRY_LIMITS: EntryLimits = {
  byAddress: { tries: 30, seconds: QUARTER },
  codes: { tries: 5000, seconds: HOUR },
  linksByAddress: { tries: 20, seconds: HOUR },
  linksByMail: { tries: 5, seconds: HOUR },
  links: { tries: 5000, seconds: HOUR },
  writes: { tries: 60, seconds: QUARTER },
}

/** Counts what comes to entrants' private pages; each throws a 429 Problem where there was too much. */
export interface EntryGuard {
  /** Counts a code before it is looked up. */
  beforeCode(address: string): Promise<void>
  /** A code that fitted is taken back: opening one's own page any number of times costs nothing. */
  afterCode(address: string): Promise<void>
  /** Counts a link that fits nobody. A mailed link has 256 bits: it is looked up first, and a right one never waits. */
  afterWrongLink(address: string): Promise<void>
  beforeRequest(address: string, email: string): Promise<void>
  beforeWrite(address: string): Promise<void>
}

const ALL = 'all'
const WRONG = 'Too many links or codes that fit nobody were tried from your network.'

export function createEntryGuard(pool: Pool, limits: EntryLimits = DEFAULT_ENTRY_LIMITS): EntryGuard {
  const byAddress = createLimiter(pool, 'entry-address', limits.byAddress)
  const codes = createLimiter(pool, 'entry-codes', limits.codes)
  const linksByAddress = createLimiter(pool, 'entry-links-address', limits.linksByAddress)
  const linksByMail = createLimiter(pool, 'entry-links-mail', limits.linksByMail)
  const links = createLimiter(pool, 'entry-links', limits.links)
  const writes = createLimiter(pool, 'entry-writes', limits.writes)
  return {
    async beforeCode(from) {
      await count(byAddress, hashed(from), WRONG)
      await count(codes, ALL, 'Too many codes that fit nobody were tried on this site.')
    },
    async afterCode(from) {
      await byAddress.reward(hashed(from))
      await codes.reward(ALL)
    },
    afterWrongLink: (from) => count(byAddress, hashed(from), WRONG),
    async beforeRequest(from, to) {
      await count(linksByAddress, hashed(from), 'Too many links were asked for from your network.')
      await count(linksByMail, hashed(to), 'Links were sent to this address several times: look among your mail.')
      await count(links, ALL, 'Too many links are asked for on this site at the moment.')
    },
    beforeWrite: (from) => count(writes, hashed(from), 'Too much was sent from your network.'),
  }
}
