import { createWriteStream } from 'node:fs'
import { Readable } from 'node:stream'
import type { ReadableStream } from 'node:stream/web'
import { pipeline } from 'node:stream/promises'

/** An archive could not be fetched; the message is a whole sentence. */
export class FetchError extends Error {}

export interface FetchLimits {
  /** Most bytes to take. */
  readonly maxBytes: number
  /** Longest time for the whole fetch, in milliseconds. */
  readonly timeout: number
}

/** A zip of 1 GiB unpacked can be a little longer than that where nothing in it shrinks. */
export const FETCH_LIMITS: FetchLimits = { maxBytes: 2 ** 30 + 2 ** 24, timeout: 10 * 60_000 }

/** Fetches an archive into a new file. Throws FetchError where the address does not answer with one in time. */
export async function fetchArchive(url: URL, file: string, limits: FetchLimits = FETCH_LIMITS): Promise<void> {
  const signal = AbortSignal.timeout(limits.timeout)
  try {
    const response = await fetch(url, { signal, headers: { accept: 'application/zip' } })
    if (response.status === 404) {
      throw new FetchError(`${url.href} is not there. A draw has an archive once it is drawn; look at its page.`)
    }
    if (!response.ok || response.body === null)
      throw new FetchError(`${url.href} answered with status ${response.status}.`)
    let read = 0
    const limited = async function* (chunks: AsyncIterable<Uint8Array>) {
      for await (const chunk of chunks) {
        read += chunk.length
        if (read > limits.maxBytes) throw new FetchError(`${url.href} is longer than any proof archive can be.`)
        yield chunk
      }
    }
    await pipeline(
      Readable.fromWeb(response.body as ReadableStream),
      limited,
      createWriteStream(file, { flags: 'wx' }),
      { signal },
    )
  } catch (error) {
    if (error instanceof FetchError) throw error
    if (signal.aborted) throw new FetchError(`${url.href} did not answer in time.`)
    const reason = error instanceof Error && error.cause instanceof Error ? error.cause.message : String(error)
    throw new FetchError(`${url.href} could not be fetched: ${reason}.`)
  }
}
