/** Why an archive could not be fetched, in a whole sentence. */
export class FetchError extends Error {}

/** A zip of 1 GiB unpacked can be a little longer than that where nothing in it shrinks. */
export const MAX_ARCHIVE_FILE = 2 ** 30 + 2 ** 24

/** Bytes that are gathered before they are handed to the browser's own store, which keeps large ones on disk. */
const PART = 2 ** 22

/** Fetches an archive. `tell` hears of bytes so far and of all bytes, null where the server does not say. */
export async function fetchArchive(
  url: string,
  tell: (done: number, total: number | null) => void,
  request: typeof fetch = fetch,
): Promise<Blob> {
  const response = await request(url, { credentials: 'omit', headers: { accept: 'application/zip' } }).catch(() => null)
  if (response === null) throw new FetchError('The archive could not be reached. Is there a connection?')
  if (response.status === 404) {
    throw new FetchError('There is no archive at this address. A draw has one a few minutes after it is drawn.')
  }
  if (!response.ok || response.body === null) {
    throw new FetchError(`The site answered with status ${response.status} and no archive. Try again in a minute.`)
  }
  const stated = Number(response.headers.get('content-length') ?? Number.NaN)
  const total = Number.isSafeInteger(stated) && stated > 0 ? stated : null
  const reader = response.body.getReader()
  const parts: Blob[] = []
  let gathered: Uint8Array<ArrayBuffer>[] = []
  let waiting = 0
  let done = 0
  for (;;) {
    const piece = await reader.read().catch(() => null)
    if (piece === null) throw new FetchError('The connection broke off before the archive was whole. Try again.')
    if (piece.done) break
    done += piece.value.length
    if (done > MAX_ARCHIVE_FILE) {
      void reader.cancel()
      throw new FetchError('What the site sends is longer than any proof archive can be.')
    }
    gathered.push(piece.value)
    waiting += piece.value.length
    if (waiting >= PART) {
      parts.push(new Blob(gathered))
      gathered = []
      waiting = 0
    }
    tell(done, total)
  }
  return new Blob([...parts, ...gathered])
}
