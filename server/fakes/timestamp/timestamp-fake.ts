import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import { setTimeout as wait } from 'node:timers/promises'
import { DerError } from '#shared/timestamp/der.ts'
import { refuseTimestamp, signDevelopmentTimestamp } from '#shared/timestamp/development-authority.ts'
import { parseTimestampRequest, type TimestampRequest } from '#shared/timestamp/request.ts'
import { listenOnLoopback } from '../loopback.ts'

/** How the authority behaves. */
export type Behaviour =
  | { readonly mode: 'right' }
  /** Hangs up on everybody. */
  | { readonly mode: 'down' }
  /** Answers rightly, after so many milliseconds. */
  | { readonly mode: 'slow'; readonly milliseconds: number }
  /** Signs a timestamp of something else. */
  | { readonly mode: 'lie' }
  /** Refuses, by the protocol. */
  | { readonly mode: 'refuse' }
  /** Its clock is wrong by so many seconds. */
  | { readonly mode: 'off'; readonly seconds: number }

export interface TimestampFakeOptions {
  /** 0 takes a free port. */
  readonly port: number
  readonly now?: () => Date
  /** Opens POST /control, which takes a Behaviour as JSON: for tests that run the fake as a process of its own. */
  readonly control?: boolean
}

export interface TimestampFake {
  readonly url: string
  behave(behaviour: Behaviour): void
  /** How many timestamps it has signed. */
  readonly signed: () => number
  close(): Promise<void>
}

/** Requests have some 70 bytes. */
const LARGEST_REQUEST = 4096

/**
 * An RFC 3161 authority on loopback (section 3.4: HTTP). It signs real tokens with the development authority's key,
 * which everybody knows.
 */
export async function startTimestampFake(options: TimestampFakeOptions): Promise<TimestampFake> {
  const now = options.now ?? (() => new Date())
  let behaviour: Behaviour = { mode: 'right' }
  let signed = 0
  let serial = Date.now() * 1000

  function sign(request: TimestampRequest): Uint8Array {
    if (behaviour.mode === 'refuse') return refuseTimestamp('This authority refuses today.')
    const off = behaviour.mode === 'off' ? behaviour.seconds : 0
    const imprint = behaviour.mode === 'lie' ? request.imprint.map((byte) => byte ^ 0xff) : request.imprint
    signed += 1
    serial += 1
    return signDevelopmentTimestamp({ ...request, imprint }, Math.floor(now().getTime() / 1000) + off, serial)
  }

  async function answer(req: IncomingMessage, res: ServerResponse): Promise<void> {
    const { pathname } = new URL(req.url ?? '/', 'http://localhost')
    if (options.control && req.method === 'POST' && pathname === '/control') {
      behaviour = JSON.parse((await bodyOf(req)).toString()) as Behaviour
      return send(res, 200, 'application/json', Buffer.from(JSON.stringify(behaviour)))
    }
    if (behaviour.mode === 'down') return void req.socket.destroy()
    if (req.method !== 'POST') return send(res, 405, 'text/plain', Buffer.from('Ask with POST.'))
    if (req.headers['content-type'] !== 'application/timestamp-query') {
      return send(res, 415, 'text/plain', Buffer.from('Ask with application/timestamp-query.'))
    }
    const body = await bodyOf(req)
    if (behaviour.mode === 'slow') await wait(behaviour.milliseconds)
    let reply: Uint8Array
    try {
      reply = sign(parseTimestampRequest(new Uint8Array(body)))
    } catch (error) {
      if (!(error instanceof DerError)) throw error
      reply = refuseTimestamp(error.message)
    }
    send(res, 200, 'application/timestamp-reply', reply)
  }

  const server = createServer((req, res) => {
    answer(req, res).catch(() => {
      if (res.headersSent) res.destroy()
      else send(res, 400, 'text/plain', Buffer.from('This is no request.'))
    })
  })
  const listening = await listenOnLoopback(server, options.port)
  return {
    ...listening,
    signed: () => signed,
    behave: (next) => {
      behaviour = next
    },
  }
}

async function bodyOf(req: IncomingMessage): Promise<Buffer> {
  const pieces: Buffer[] = []
  let size = 0
  for await (const piece of req) {
    size += (piece as Buffer).length
    if (size > LARGEST_REQUEST) throw new Error('too long')
    pieces.push(piece as Buffer)
  }
  return Buffer.concat(pieces)
}

function send(res: ServerResponse, status: number, type: string, body: Uint8Array): void {
  res.writeHead(status, { 'content-type': type, 'content-length': String(body.length) })
  res.end(body)
}
