import { setTimeout as wait } from 'node:timers/promises'
import { toHex } from '#shared/bytes/hex.ts'
import { verifyBeaconRound } from '#shared/protocol/beacon.ts'
import type { Network } from '#shared/protocol/networks.ts'
import { type Clock, systemClock } from '../clock/clock.ts'
import { sha256 } from '../hash/sha256.ts'
import { type Health, reasonOf } from '../health.ts'
import { askRelay, type RelayAnswer } from './relay.ts'

export interface BeaconReaderOptions {
  /** Base addresses of relays that speak drand's HTTP paths, in the order in which they are asked. */
  readonly relays: readonly string[]
  /** How long one relay may take, in milliseconds. */
  readonly timeoutMs?: number
  /** How long one relay's head start before the next is, in milliseconds. */
  readonly staggerMs?: number
  readonly clock?: Clock
  readonly fetch?: typeof fetch
}

/** A round whose signature verifies under the network's key; hex. */
export interface VerifiedRound {
  readonly round: number
  readonly signature: string
  readonly randomness: string
  readonly relay: string
}

/** Why a relay gave no round that verifies. */
export interface RelayReason {
  readonly relay: string
  readonly why: 'not-yet' | 'unreachable' | 'wrong'
  readonly detail: string
}

/** A relay gave an answer that is false: worth an administrator's look. */
export interface WrongAnswer {
  readonly relay: string
  readonly what: string
  readonly at: Date
}

/**
 * `not-yet`: no relay gave a round that verifies, and one at least says that it is not there yet. `unreachable`: none
 * says even that. There is no third source: nothing stands in for the round that a seal names.
 */
export type BeaconAnswer =
  | { readonly kind: 'round'; readonly round: VerifiedRound; readonly wrong: readonly WrongAnswer[] }
  | {
      readonly kind: 'not-yet' | 'unreachable'
      readonly reasons: readonly RelayReason[]
      readonly wrong: readonly WrongAnswer[]
    }

export interface RelayHealth extends Health {
  readonly relay: string
  /** The newest round that it gave, if that verifies. */
  readonly round: number | null
}

export interface BeaconReader {
  /** Asks for a round of a network, whose key decides what is right. Never throws for what relays do. */
  read(network: Network, round: number): Promise<BeaconAnswer>
  /** The newest round of each relay. */
  check(network: Network): Promise<readonly RelayHealth[]>
}

type Outcome = { readonly round: VerifiedRound } | { readonly reason: RelayReason }

export function createBeaconReader(options: BeaconReaderOptions): BeaconReader {
  const { relays } = options
  const clock = options.clock ?? systemClock
  const ask = (relay: string, network: Network, round: number | 'latest', signal?: AbortSignal) =>
    askRelay({
      relay,
      chain: network.chain,
      round,
      timeoutMs: options.timeoutMs ?? 5_000,
      fetch: options.fetch ?? fetch,
      ...(signal ? { signal } : {}),
    })

  return {
    async read(network, round) {
      const stop = new AbortController()
      const wrong: WrongAnswer[] = []
      const reasons: RelayReason[] = []
      const tries = relays.map(async (relay, index) => {
        // A relay that fails at once does not shorten the others' head starts: they are short.
        await wait(index * (options.staggerMs ?? 250), undefined, { signal: stop.signal })
        return judge(relay, network, await ask(relay, network, round, stop.signal))
      })
      const found = await firstRound(tries, (reason) => {
        reasons.push(reason)
        if (reason.why === 'wrong') wrong.push({ relay: reason.relay, what: reason.detail, at: clock.now() })
      })
      stop.abort()
      if (found) return { kind: 'round', round: found, wrong }
      const kind = reasons.some((reason) => reason.why === 'not-yet') ? 'not-yet' : 'unreachable'
      return { kind, reasons, wrong }
    },
    check: (network) =>
      Promise.all(
        relays.map(async (relay) => {
          const start = performance.now()
          const outcome = judge(relay, network, await ask(relay, network, 'latest'))
          const milliseconds = Math.round(performance.now() - start)
          return 'round' in outcome
            ? {
                relay,
                ok: true,
                round: outcome.round.round,
                milliseconds,
                detail: `It gave round ${outcome.round.round}.`,
              }
            : { relay, ok: false, round: null, milliseconds, detail: outcome.reason.detail }
        }),
      ),
  }
}

/** Holds an answer against the network's key. */
function judge(relay: string, network: Network, answer: RelayAnswer): Outcome {
  if (answer.kind !== 'round') return { reason: { relay, why: answer.kind, detail: answer.detail } }
  const { round, signature } = answer
  const verified = verifyBeaconRound(sha256, { publicKey: network.publicKey, round, signature })
  if (!verified.ok) return { reason: { relay, why: 'wrong', detail: `Round ${round}: ${verified.error.message}` } }
  const randomness = toHex(verified.value)
  if (answer.randomness !== undefined && answer.randomness !== randomness)
    return {
      reason: { relay, why: 'wrong', detail: `Round ${round}: its randomness is not the hash of its signature.` },
    }
  return { round: { round, signature, randomness, relay } }
}

/** The first round among several tries; undefined once all have failed. */
function firstRound(
  tries: readonly Promise<Outcome>[],
  onReason: (reason: RelayReason) => void,
): Promise<VerifiedRound | undefined> {
  return new Promise((resolve, reject) => {
    let decided = false
    let left = tries.length
    if (left === 0) resolve(undefined)
    for (const attempt of tries)
      attempt.then(
        (outcome) => {
          if (decided) return
          if ('round' in outcome) {
            decided = true
            resolve(outcome.round)
            return
          }
          onReason(outcome.reason)
          left -= 1
          if (left === 0) resolve(undefined)
        },
        (error: unknown) => {
          // Tries that are called off after the decision end here too.
          if (!decided) reject(error instanceof Error ? error : new Error(reasonOf(error)))
        },
      )
  })
}
