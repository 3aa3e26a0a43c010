import type { IncomingMessage, ServerResponse } from 'node:http'
import { newNonce } from '#server/http/middleware/security-headers.ts'
import type { KeptPage } from '#server/http/pages/kept-page.ts'

interface Entry {
  readonly page: KeptPage
  readonly madeAt: number
  refreshing: boolean
}

/** For this long a page is sent as it was rendered: nobody sees a state older than a second. */
const FRESH_MS = 1000
/** While one request renders it anew, others still get the old one, up to this age. */
const STALE_MS = 5000
const MAX_WEIGHT = 48 * 1024 * 1024

/**
 * Public pages as visitors without a session see them, kept for a second. A crowd that watches one result page costs one
 * rendering a second; any write in this process empties it at once.
 */
export class PageCache {
  readonly #entries = new Map<string, Entry>()
  readonly #pending = new Map<string, Promise<KeptPage | null>>()
  readonly #cookie: string
  readonly #now: () => number
  #weight = 0
  #generation = 0

  /** `now` counts milliseconds from anywhere and never goes back. */
  constructor(options: { readonly sessionCookie: string; readonly now?: () => number }) {
    this.#cookie = `${options.sessionCookie}=`
    this.#now = options.now ?? (() => performance.now())
  }

  /** Whether a request may be answered from here at all. */
  concerns(request: IncomingMessage): boolean {
    if (request.method !== 'GET' && request.method !== 'HEAD') return false
    return !request.headers.cookie?.includes(this.#cookie)
  }

  /** Answers at once where a page is at hand; false where the request has to go its whole way. */
  serve(request: IncomingMessage, response: ServerResponse): boolean {
    if (!this.concerns(request)) return false
    const entry = this.#entries.get(request.url ?? '')
    if (!entry) return false
    const age = this.#now() - entry.madeAt
    if (age > FRESH_MS && !(entry.refreshing && age < STALE_MS)) {
      entry.refreshing = true
      return false
    }
    send(entry.page, request, response)
    return true
  }

  /**
   * The page at `url`: rendered by `produce` once for all who ask meanwhile, and kept. `produce` answers null for a page
   * that is not to be kept (not found, a redirect): each then renders its own.
   */
  async fill(url: string, produce: () => Promise<KeptPage | null>): Promise<KeptPage | null> {
    const running = this.#pending.get(url)
    if (running) return running
    const generation = this.#generation
    const madeAt = this.#now()
    const making = produce()
    this.#pending.set(url, making)
    try {
      const page = await making
      if (page && generation === this.#generation) this.#keep(url, { page, madeAt, refreshing: false })
      return page
    } finally {
      if (this.#pending.get(url) === making) this.#pending.delete(url)
    }
  }

  /** Forgets everything, pages being rendered at this moment too. */
  clear(): void {
    this.#generation++
    this.#entries.clear()
    this.#pending.clear()
    this.#weight = 0
  }

  #keep(url: string, entry: Entry): void {
    this.#drop(url)
    this.#entries.set(url, entry)
    this.#weight += entry.page.weight
    for (const oldest of this.#entries.keys()) {
      if (this.#weight <= MAX_WEIGHT) break
      this.#drop(oldest)
    }
  }

  #drop(url: string): void {
    const entry = this.#entries.get(url)
    if (!entry) return
    this.#entries.delete(url)
    this.#weight -= entry.page.weight
  }
}

/** Sends a kept page with a nonce made for this one response. */
export function send(page: KeptPage, request: IncomingMessage, response: ServerResponse): void {
  const nonce = newNonce()
  const headers = page.headers(nonce)
  const packed = acceptsGzip(request.headers['accept-encoding'])
  const body = packed ? page.gzip(nonce) : page.plain(nonce)
  if (packed) headers.push('Content-Encoding', 'gzip')
  headers.push('Content-Length', String(body.length))
  response.writeHead(page.status, headers)
  response.end(request.method === 'HEAD' ? undefined : body)
}

function acceptsGzip(header: string | string[] | undefined): boolean {
  if (header === undefined) return false
  return String(header)
    .split(',')
    .some((part) => /^\s*(gzip|\*)\s*(;\s*q=(?!0(\.0*)?\s*$)[\d.]+\s*)?$/i.test(part))
}
