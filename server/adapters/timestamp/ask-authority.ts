import { reasonOf } from '../health.ts'

/** One request to one authority over HTTP (RFC 3161 section 3.4). */
export interface AuthorityQuestion {
  readonly url: string
  /** A TimeStampReq. */
  readonly request: Uint8Array
  readonly timeoutMs: number
  readonly largestAnswer: number
  readonly fetch: typeof fetch
}

export type AuthorityAnswer =
  | { readonly kind: 'answer'; readonly response: Uint8Array }
  | { readonly kind: 'unreachable' | 'wrong'; readonly detail: string }

/** What an authority answers; nothing of it is verified yet. Never throws for what it does. */
export async function askAuthority(question: AuthorityQuestion): Promise<AuthorityAnswer> {
  const timeout = AbortSignal.timeout(question.timeoutMs)
  try {
    const response = await question.fetch(question.url, {
      method: 'POST',
      headers: { 'content-type': 'application/timestamp-query', accept: 'application/timestamp-reply' },
      body: new Uint8Array(question.request),
      signal: timeout,
      cache: 'no-store',
    })
    if (!response.ok) {
      await response.body?.cancel()
      return { kind: 'unreachable', detail: `It answered with HTTP ${response.status}.` }
    }
    const bytes = await readLimited(response, question.largestAnswer)
    return bytes === null
      ? { kind: 'wrong', detail: 'Its answer is longer than any timestamp.' }
      : { kind: 'answer', response: bytes }
  } catch (error) {
    const seconds = question.timeoutMs / 1000
    return {
      kind: 'unreachable',
      detail: timeout.aborted ? `It did not answer within ${seconds} s.` : `It cannot be reached: ${reasonOf(error)}`,
    }
  }
}

async function readLimited(response: Response, most: number): Promise<Uint8Array | null> {
  const pieces: Uint8Array[] = []
  let size = 0
  for await (const piece of response.body ?? []) {
    size += piece.length
    if (size > most) return null
    pieces.push(piece)
  }
  return new Uint8Array(Buffer.concat(pieces))
}
