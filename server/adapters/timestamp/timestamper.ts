import { toHex } from '#shared/bytes/hex.ts'
import type { Certificate } from '#shared/timestamp/certificate.ts'
import { DEVELOPMENT_AUTHORITY, signDevelopmentTimestamp } from '#shared/timestamp/development-authority.ts'
import { timestampRequest } from '#shared/timestamp/request.ts'
import { MAX_RESPONSE_BYTES } from '#shared/timestamp/token.ts'
import { type VerifiedTimestamp, verifyTimestamp } from '#shared/timestamp/verify-timestamp.ts'
import type { Clock } from '../clock/clock.ts'
import { type Entropy, systemEntropy } from '../entropy/entropy.ts'
import type { Health } from '../health.ts'
import { askAuthority } from './ask-authority.ts'

/** A timestamp that verified under a trusted certificate. */
export interface Stamped {
  /** The TimeStampResp: what `seal.tsr` holds. */
  readonly response: Uint8Array
  readonly genTime: Date
  /** The instant at which the thing existed whatever the accuracy. */
  readonly latest: Date
  /** Whose timestamp it is: the name in the signer's certificate. */
  readonly authority: string
}

export interface AuthorityReason {
  readonly url: string
  readonly detail: string
}

export type StampAnswer =
  | { readonly kind: 'stamped'; readonly stamp: Stamped }
  | { readonly kind: 'none'; readonly reasons: readonly AuthorityReason[] }

export interface AuthorityHealth extends Health {
  readonly url: string
}

/** Asks authorities for timestamps (RFC 3161). Never throws for what they do. */
export interface Timestamper {
  /**
   * A timestamp over a SHA-256 digest, from the first authority that gives a good one. `withinMs`: how long each may take,
   * where that is less than usual.
   */
  stamp(imprint: Uint8Array, withinMs?: number): Promise<StampAnswer>
  /** What each authority gives today; a good answer is believed for some minutes, so that nobody is asked too often. */
  check(): Promise<readonly AuthorityHealth[]>
}

export interface TimestamperOptions {
  /** In the order in which they are asked. */
  readonly urls: readonly string[]
  readonly trusted: readonly Certificate[]
  readonly clock: Clock
  readonly entropy?: Entropy
  /** How long one authority may take, in milliseconds. */
  readonly timeoutMs?: number
  readonly fetch?: typeof fetch
}

/** An authority's clock may differ from ours by so many seconds; beyond that one of the two is wrong. */
const MOST_SECONDS_OFF = 300
const CHECKED_FOR_MS = 10 * 60_000

export function createTimestamper(options: TimestamperOptions): Timestamper {
  const { urls, trusted, clock } = options
  const entropy = options.entropy ?? systemEntropy
  const known = new Map<string, { readonly health: AuthorityHealth; readonly until: number }>()

  async function ask(url: string, imprint: Uint8Array, withinMs = Infinity): Promise<Stamped | AuthorityReason> {
    const nonce = entropy.bytes(16)
    const answer = await askAuthority({
      url,
      request: timestampRequest({ imprint, nonce, certificates: true }),
      timeoutMs: Math.min(withinMs, options.timeoutMs ?? 10_000),
      largestAnswer: MAX_RESPONSE_BYTES,
      fetch: options.fetch ?? fetch,
    })
    if (answer.kind !== 'answer') return { url, detail: answer.detail }
    const found = verifyTimestamp(answer.response, { imprint, trusted, nonce })
    if (!found.ok) return { url, detail: found.error.message }
    if (found.value.trustedBy === null) {
      return { url, detail: `No trusted certificate vouches for ${found.value.signer.name || 'its signer'}.` }
    }
    const off = Math.round(found.value.info.genTime - clock.now().getTime() / 1000)
    if (Math.abs(off) > MOST_SECONDS_OFF) {
      return { url, detail: `Its clock and ours differ by ${Math.abs(off)} seconds.` }
    }
    return stampedOf(answer.response, found.value)
  }

  return {
    async stamp(imprint, withinMs) {
      const reasons: AuthorityReason[] = []
      for (const url of urls) {
        const outcome = await ask(url, imprint, withinMs)
        if ('response' in outcome) return { kind: 'stamped', stamp: outcome }
        reasons.push(outcome)
      }
      return { kind: 'none', reasons }
    },
    check: () =>
      Promise.all(
        urls.map(async (url) => {
          const start = performance.now()
          const before = known.get(url)
          if (before && start < before.until) return before.health
          const outcome = await ask(url, entropy.bytes(32))
          const milliseconds = Math.round(performance.now() - start)
          const ok = 'response' in outcome
          const detail = ok ? `It gave a timestamp, signed by ${outcome.authority}.` : outcome.detail
          const health = { url, ok, milliseconds, detail }
          if (ok) known.set(url, { health, until: start + CHECKED_FOR_MS })
          else known.delete(url)
          return health
        }),
      ),
  }
}

/**
 * Timestamps of the development authority at the time of a clock of one's own, signed in this process: for demo data of
 * days gone by, which no authority would sign.
 */
export function createDevelopmentTimestamper(clock: Clock): Timestamper {
  return {
    async stamp(imprint) {
      const genTime = Math.floor(clock.now().getTime() / 1000)
      const serial = Number.parseInt(toHex(systemEntropy.bytes(6)), 16)
      const response = signDevelopmentTimestamp({ imprint, nonce: null, certificates: true }, genTime, serial)
      const found = verifyTimestamp(response, { imprint, trusted: [DEVELOPMENT_AUTHORITY] })
      if (!found.ok) return { kind: 'none', reasons: [{ url: 'development', detail: found.error.message }] }
      return { kind: 'stamped', stamp: stampedOf(response, found.value) }
    },
    check: () => Promise.resolve([]),
  }
}

const stampedOf = (response: Uint8Array, { info, signer }: VerifiedTimestamp): Stamped => ({
  response,
  genTime: new Date(info.genTime * 1000),
  latest: new Date(info.latest * 1000),
  authority: signer.name,
})
