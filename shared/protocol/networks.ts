import type { Beacon } from './seal-types.ts'

/** The beacon networks that a seal may name (PROTOCOL section 3). Anything else fails. */

/** A network without the round: what a seal's beacon must equal. */
export type Network = Omit<Beacon, 'round'>

const SCHEME = 'bls-unchained-g1-rfc9380'

/** drand quicknet, the pinned network. */
export const QUICKNET: Network = {
  chain: '52db9ba70e0cc0f6eaf7803dd07447a1f5477735fd3f661792ba94600c84e971',
  genesisTime: 1_692_803_367,
  period: 3,
  publicKey:
    '83cf0f2896adee7eb8b5f01fcad3912212c437e0073e911fb90022d3e760183c8c4b450b6a0a6c3ac6a5776a2d106451' +
    '0d1fec758c921cc22b0e17e63aaf4bcb5ed66304de9cf809bd274ca73bab4af5a6e9c76a4bc09e76eae8991ef5ece45a',
  scheme: SCHEME,
}

/**
 * The development chain. Its secret is public (`development-chain.ts`), so it shows nothing about fairness: it passes
 * only under an explicit flag, and the verdict names it.
 */
export const DEVELOPMENT_CHAIN: Network = {
  chain: '4fcc0ef382cd4fd48ab4445bbd17747645fff1315b2a4facd0ed570d284b4ebe',
  genesisTime: 1_767_225_600,
  period: 3,
  publicKey:
    '8dd939c1f055c7a22f8c8e3f31dfbdb5b7137a23838a6dfb377c2624ea1bd72173f964ac53e23a20508116ac96073f4c' +
    '0e68a70a404eb50dab512d4e774d0c70ebcc9b3b720e4a339ab49be0dd7c4c4ea176da10adefc7d47bfe920cf46e811d',
  scheme: SCHEME,
}

/** The times of a chain's rounds. */
export interface RoundClock {
  /** Time of round 1, in seconds since 1970. */
  readonly genesisTime: number
  /** Seconds between rounds. */
  readonly period: number
}

/** Time of a round in seconds since 1970: genesisTime + (round − 1)·period. Requires round ≥ 1. */
export function roundTime(clock: RoundClock, round: number): number {
  if (!Number.isSafeInteger(round) || round < 1) throw new RangeError(`no round ${round}`)
  return clock.genesisTime + (round - 1) * clock.period
}

/** The first round, 1 at least, whose time is at or after `seconds`, a whole number of seconds since 1970. */
export function firstRoundFrom(clock: RoundClock, seconds: number): number {
  if (!Number.isSafeInteger(seconds)) throw new RangeError(`no such time: ${seconds}`)
  return Math.max(1, Math.ceil((seconds - clock.genesisTime) / clock.period) + 1)
}

/** The last round whose time has come at `seconds`, or null before the first. */
export function latestRoundAt(clock: RoundClock, seconds: number): number | null {
  if (!Number.isFinite(seconds)) throw new RangeError(`no such time: ${seconds}`)
  return seconds < clock.genesisTime ? null : Math.floor((seconds - clock.genesisTime) / clock.period) + 1
}

/** The beacon that a seal names for a draw at `drawAt`, in seconds since 1970 (section 3). */
export function beaconFor(network: Network, drawAt: number): Beacon {
  return { ...network, round: firstRoundFrom(network, drawAt) }
}

/** Which of the two known networks a beacon belongs to, by every one of its parameters; null for neither. */
export function networkOf(beacon: Network): 'quicknet' | 'development' | null {
  const same = (pinned: Network): boolean =>
    beacon.chain === pinned.chain &&
    beacon.genesisTime === pinned.genesisTime &&
    beacon.period === pinned.period &&
    beacon.publicKey === pinned.publicKey &&
    beacon.scheme === pinned.scheme
  return same(QUICKNET) ? 'quicknet' : same(DEVELOPMENT_CHAIN) ? 'development' : null
}
