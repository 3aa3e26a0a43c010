import { createHash, createHmac } from 'node:crypto'

/** The parts of AWS Signature Version 4 (Amazon S3 API reference, "Authenticating requests"), each a pure function. */

export interface SignedRequest {
  readonly method: string
  /** Path and query exactly as they stand in the request line. */
  readonly url: string
  readonly headers: Readonly<Record<string, string | string[] | undefined>>
}

export const emptySha256 = 'e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855'

export const sha256Hex = (data: string | Uint8Array) => createHash('sha256').update(data).digest('hex')

const hmac = (key: string | Uint8Array, text: string) => createHmac('sha256', key).update(text).digest()

/** Percent-encodes everything but A-Z a-z 0-9 - . _ ~, as UTF-8, with capital digits. */
export const uriEncode = (text: string) =>
  encodeURIComponent(text).replace(/[!'()*]/g, (c) => `%${c.charCodeAt(0).toString(16).toUpperCase()}`)

/** Splits a request line's target; the values are decoded, a plus sign stays one. */
export function splitUrl(url: string): { path: string; query: [string, string][] } {
  const mark = url.indexOf('?')
  const path = mark < 0 ? url : url.slice(0, mark)
  const query = mark < 0 ? '' : url.slice(mark + 1)
  const pairs = query
    .split('&')
    .filter((part) => part !== '')
    .map((part): [string, string] => {
      const equals = part.indexOf('=')
      return equals < 0
        ? [decodeURIComponent(part), '']
        : [decodeURIComponent(part.slice(0, equals)), decodeURIComponent(part.slice(equals + 1))]
    })
  return { path: decodeURIComponent(path), query: pairs }
}

const byCodeUnit = (a: string, b: string) => (a < b ? -1 : a > b ? 1 : 0)

/** A header's value as it is signed: several joined by commas, trimmed, runs of spaces made one. */
export function headerValue(request: SignedRequest, name: string): string | undefined {
  const value = request.headers[name]
  if (value === undefined) return undefined
  const whole = Array.isArray(value) ? value.join(',') : value
  return whole.trim().replace(/ +/g, ' ')
}

export function canonicalRequest(
  request: SignedRequest,
  signedHeaders: readonly string[],
  payloadHash: string,
): string {
  const { path, query } = splitUrl(request.url)
  const canonicalQuery = query
    .filter(([name]) => name !== 'X-Amz-Signature')
    .map(([name, value]) => [uriEncode(name), uriEncode(value)] as const)
    .sort((a, b) => byCodeUnit(a[0], b[0]) || byCodeUnit(a[1], b[1]))
    .map(([name, value]) => `${name}=${value}`)
    .join('&')
  return [
    request.method,
    path.split('/').map(uriEncode).join('/'),
    canonicalQuery,
    ...signedHeaders.map((name) => `${name}:${headerValue(request, name) ?? ''}`),
    '',
    signedHeaders.join(';'),
    payloadHash,
  ].join('\n')
}

/** @param scope date/region/service/aws4_request */
export const stringToSign = (amzDate: string, scope: string, canonical: string) =>
  ['AWS4-HMAC-SHA256', amzDate, scope, sha256Hex(canonical)].join('\n')

/** @param scope date/region/service/aws4_request */
export function signingKey(secret: string, scope: string): Uint8Array {
  return scope.split('/').reduce<string | Uint8Array>((key, part) => hmac(key, part), `AWS4${secret}`) as Uint8Array
}

export const sign = (key: Uint8Array, text: string) => hmac(key, text).toString('hex')

/** Signature of one chunk of STREAMING-AWS4-HMAC-SHA256-PAYLOAD, chained to the one before it. */
export const chunkSignature = (key: Uint8Array, amzDate: string, scope: string, previous: string, dataSha256: string) =>
  sign(key, ['AWS4-HMAC-SHA256-PAYLOAD', amzDate, scope, previous, emptySha256, dataSha256].join('\n'))

/** Signature of the trailing headers of STREAMING-AWS4-HMAC-SHA256-PAYLOAD-TRAILER. */
export const trailerSignature = (key: Uint8Array, amzDate: string, scope: string, previous: string, trailer: string) =>
  sign(key, ['AWS4-HMAC-SHA256-TRAILER', amzDate, scope, previous, sha256Hex(trailer)].join('\n'))

/** 20130524T000000Z as a time; undefined if it is not one. */
export function parseAmzDate(text: string): Date | undefined {
  const parts = /^(\d{4})(\d\d)(\d\d)T(\d\d)(\d\d)(\d\d)Z$/.exec(text)
  if (!parts) return undefined
  const [, y, mo, d, h, mi, s] = parts
  const time = new Date(`${y}-${mo}-${d}T${h}:${mi}:${s}Z`)
  return Number.isNaN(time.getTime()) ? undefined : time
}
