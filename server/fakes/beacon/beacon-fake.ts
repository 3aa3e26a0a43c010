import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import { hash } from 'node:crypto'
import { setTimeout as wait } from 'node:timers/promises'
import { signDevelopmentRound } from '#shared/protocol/development-chain.ts'
import { DEVELOPMENT_CHAIN, latestRoundAt, type Network, roundTime } from '#shared/protocol/networks.ts'
import { listenOnLoopback } from '../loopback.ts'

/** How the relay behaves. */
export type Behaviour =
  | { readonly mode: 'right' }
  /** Hangs up on everybody. */
  | { readonly mode: 'down' }
  /** Answers rightly, after so many milliseconds. */
  | { readonly mode: 'slow'; readonly milliseconds: number }
  /** Gives a real signature, but of the round before. */
  | { readonly mode: 'lie' }
  /** Gives something that is no round at all. */
  | { readonly mode: 'garble' }
  /** Its clock is behind by so many seconds. */
  | { readonly mode: 'late'; readonly seconds: number }

export interface BeaconFakeOptions {
  /** 0 takes a free port. */
  readonly port: number
  readonly now?: () => Date
  /** Opens POST /control, which takes a Behaviour as JSON: for tests that run the fake as a process of its own. */
  readonly control?: boolean
}

export interface BeaconFake {
  readonly url: string
  behave(behaviour: Behaviour): void
  /** Rounds that were asked for, in order. */
  readonly asked: readonly number[]
  close(): Promise<void>
}

const sha256 = (data: Uint8Array) => hash('sha256', data, 'buffer')

/**
 * A drand relay on loopback (HTTP paths of drand's handler/http/server.go) for the development chain. It signs each
 * round when it is asked for, not before its time.
 */
export async function startBeaconFake(options: BeaconFakeOptions): Promise<BeaconFake> {
  const now = options.now ?? (() => new Date())
  const asked: number[] = []
  const signed = new Map<number, ReturnType<typeof signDevelopmentRound>>()
  let behaviour: Behaviour = { mode: 'right' }

  function round(number: number) {
    const known = signed.get(number)
    if (known) return known
    const fresh = signDevelopmentRound(sha256, number)
    if (signed.size >= 1000) signed.clear()
    signed.set(number, fresh)
    return fresh
  }

  async function answer(req: IncomingMessage, res: ServerResponse): Promise<void> {
    const { pathname } = new URL(req.url ?? '/', 'http://localhost')
    if (options.control && req.method === 'POST' && pathname === '/control') {
      const pieces: Buffer[] = []
      for await (const piece of req) pieces.push(piece as Buffer)
      behaviour = JSON.parse(Buffer.concat(pieces).toString()) as Behaviour
      return send(res, 200, behaviour)
    }
    if (behaviour.mode === 'down') return void req.socket.destroy()
    if (behaviour.mode === 'slow') await wait(behaviour.milliseconds)
    if (req.method !== 'GET' && req.method !== 'HEAD') return send(res, 405, { error: 'method not allowed' })
    const late = behaviour.mode === 'late' ? behaviour.seconds : 0
    const latest = latestRoundAt(DEVELOPMENT_CHAIN, now().getTime() / 1000 - late) ?? 0
    const path = new RegExp(`^(?:/${DEVELOPMENT_CHAIN.chain})?/(info|health|public/latest|public/(\\d+))$`).exec(
      pathname,
    )
    if (pathname === '/chains') return send(res, 200, [DEVELOPMENT_CHAIN.chain], 300)
    if (!path) return send(res, 404, { error: 'not found' })
    if (path[1] === 'info') return send(res, 200, chainInfo(DEVELOPMENT_CHAIN), 604800)
    if (path[1] === 'health') return send(res, 200, { current: latest, expected: latest })
    const number = path[2] === undefined ? latest : Number(path[2])
    asked.push(number)
    if (number < 1) return send(res, 404, { error: 'no such round' })
    if (number > latest) {
      const seconds = Math.max(1, Math.ceil(roundTime(DEVELOPMENT_CHAIN, number) + late - now().getTime() / 1000))
      res.setHeader('cache-control', `public, must-revalidate, max-age=${seconds}`)
      return send(res, 404, { error: 'round not available yet' })
    }
    if (behaviour.mode === 'garble') return send(res, 200, { round: number, signature: 'none', randomness: null })
    const { signature, randomness } = round(behaviour.mode === 'lie' ? Math.max(1, number - 1) : number)
    send(res, 200, { round: number, randomness, signature }, path[2] === undefined ? DEVELOPMENT_CHAIN.period : 604800)
  }

  const server = createServer((req, res) => {
    answer(req, res).catch(() => {
      if (res.headersSent) res.destroy()
      else send(res, 400, { error: 'bad request' })
    })
  })
  const listening = await listenOnLoopback(server, options.port)
  return {
    ...listening,
    asked,
    behave: (next) => {
      behaviour = next
    },
  }
}

/** drand's /info document. `groupHash` is left out: this chain never had a group. */
function chainInfo(network: Network) {
  return {
    public_key: network.publicKey,
    period: network.period,
    genesis_time: network.genesisTime,
    hash: network.chain,
    schemeID: network.scheme,
    metadata: { beaconID: 'development' },
  }
}

function send(res: ServerResponse, status: number, body: unknown, maxAge?: number): void {
  const bytes = Buffer.from(JSON.stringify(body))
  if (maxAge !== undefined)
    res.setHeader('cache-control', `public, max-age=${maxAge}${maxAge >= 604800 ? ', immutable' : ''}`)
  res.writeHead(status, { 'content-type': 'application/json', 'content-length': String(bytes.length) })
  res.end(bytes)
}
