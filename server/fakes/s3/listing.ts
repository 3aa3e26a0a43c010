/** Listing keys in pages (Amazon S3 API reference, ListObjectsV2 and ListObjectVersions), as a pure function. */
export interface ListingQuery {
  readonly prefix: string
  readonly delimiter: string
  /** Only what sorts behind this key or common prefix. */
  readonly after: string
  /** At most so many keys and common prefixes together. */
  readonly maxKeys: number
}

export interface ListingPage {
  readonly keys: readonly string[]
  readonly commonPrefixes: readonly string[]
  readonly truncated: boolean
  /** The last key or common prefix of this page. */
  readonly last: string
}

/** S3 orders keys by their UTF-8 bytes. */
export const byBytes = (a: string, b: string) => Buffer.compare(Buffer.from(a), Buffer.from(b))

export function listKeys(all: readonly string[], query: ListingQuery): ListingPage {
  const keys: string[] = []
  const commonPrefixes: string[] = []
  let last = ''
  for (const key of [...all].sort(byBytes)) {
    if (!key.startsWith(query.prefix)) continue
    const cut = query.delimiter === '' ? -1 : key.indexOf(query.delimiter, query.prefix.length)
    const entry = cut < 0 ? key : key.slice(0, cut + query.delimiter.length)
    if (query.after !== '' && byBytes(entry, query.after) <= 0) continue
    if (cut >= 0 && commonPrefixes.at(-1) === entry) continue
    if (keys.length + commonPrefixes.length >= query.maxKeys)
      return { keys, commonPrefixes, truncated: query.maxKeys > 0, last }
    if (cut < 0) keys.push(key)
    else commonPrefixes.push(entry)
    last = entry
  }
  return { keys, commonPrefixes, truncated: false, last }
}
