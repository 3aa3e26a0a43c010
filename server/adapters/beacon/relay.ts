import { z } from 'zod'
import { reasonOf } from '../health.ts'

/** One question to one relay, over drand's HTTP paths. */
export interface RelayQuestion {
  readonly relay: string
  readonly chain: string
  readonly round: number | 'latest'
  readonly timeoutMs: number
  readonly fetch: typeof fetch
  readonly signal?: AbortSignal
}

/** What a relay said; a round is not verified yet. */
export type RelayAnswer =
  | { readonly kind: 'round'; readonly round: number; readonly signature: string; readonly randomness?: string }
  | { readonly kind: 'not-yet' | 'unreachable' | 'wrong'; readonly detail: string }

/** Real answers have some 300 bytes. */
const largestAnswer = 16 * 1024

const document = z.object({
  round: z.number().int().positive(),
  signature: z.string().regex(/^[0-9a-f]{96}$/),
  randomness: z
    .string()
    .regex(/^[0-9a-f]{64}$/)
    .optional(),
})

export async function askRelay(question: RelayQuestion): Promise<RelayAnswer> {
  const { relay, chain, round } = question
  const timeout = AbortSignal.timeout(question.timeoutMs)
  try {
    const response = await question.fetch(`${relay.replace(/\/+$/, '')}/${chain}/public/${round}`, {
      signal: question.signal ? AbortSignal.any([timeout, question.signal]) : timeout,
      headers: { accept: 'application/json' },
      // A stale answer from a cache on the way would only say "not yet" for longer.
      cache: 'no-store',
    })
    if (response.status === 404 || response.status === 425) {
      await response.body?.cancel()
      return { kind: 'not-yet', detail: `It does not have the round yet (HTTP ${response.status}).` }
    }
    if (!response.ok) {
      await response.body?.cancel()
      return { kind: 'unreachable', detail: `It answered with HTTP ${response.status}.` }
    }
    return readAnswer(await readLimited(response), round)
  } catch (error) {
    return {
      kind: 'unreachable',
      detail: timeout.aborted
        ? `It did not answer within ${question.timeoutMs / 1000} s.`
        : `It cannot be reached: ${reasonOf(error)}`,
    }
  }
}

function readAnswer(text: string | undefined, asked: number | 'latest'): RelayAnswer {
  const parsed = text === undefined ? undefined : document.safeParse(parseJson(text))
  if (!parsed?.success) return { kind: 'wrong', detail: 'Its answer is not a round.' }
  const { round, signature, randomness } = parsed.data
  if (asked !== 'latest' && round !== asked)
    return { kind: 'wrong', detail: `It gave round ${round} when asked for round ${asked}.` }
  return { kind: 'round', round, signature, ...(randomness === undefined ? {} : { randomness }) }
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text)
  } catch {
    return undefined
  }
}

/** The body as text; undefined if it is larger than any round. */
async function readLimited(response: Response): Promise<string | undefined> {
  const pieces: Uint8Array[] = []
  let size = 0
  for await (const piece of response.body ?? []) {
    size += piece.length
    if (size > largestAnswer) return undefined
    pieces.push(piece)
  }
  return Buffer.concat(pieces).toString('utf8')
}
