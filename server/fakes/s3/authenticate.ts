import { timingSafeEqual } from 'node:crypto'
import { accessDenied, invalidRequest, S3Error } from './s3-error.ts'
import {
  canonicalRequest,
  headerValue,
  parseAmzDate,
  type SignedRequest,
  sha256Hex,
  sign,
  signingKey,
  splitUrl,
  stringToSign,
} from './sigv4.ts'

export interface Credentials {
  readonly accessKeyId: string
  readonly secretAccessKey: string
}

/** What a verified signature leaves for the body to be checked with. */
export interface Authenticated {
  /** x-amz-content-sha256: a hex digest, UNSIGNED-PAYLOAD or a STREAMING-… scheme. */
  readonly payload: string
  readonly amzDate: string
  readonly scope: string
  readonly key: Uint8Array
  readonly signature: string
}

const skewMs = 15 * 60_000
const week = 7 * 24 * 3600

/** Compares two texts in a time that does not tell where they differ. */
export function sameText(a: string, b: string): boolean {
  const [x, y] = [Buffer.from(a), Buffer.from(b)]
  return x.length === y.length && timingSafeEqual(x, y)
}

interface Claim {
  readonly credential: string
  readonly signedHeaders: readonly string[]
  readonly signature: string
  readonly amzDate: string
  readonly payload: string
  readonly malformed: (message: string) => S3Error
}

/** Verifies the signature of a request, in the Authorization header or in the query (presigned). */
export function authenticate(
  request: SignedRequest,
  credentials: Credentials,
  region: string,
  now: Date,
): Authenticated {
  const query = new Map(splitUrl(request.url).query)
  const claim = query.has('X-Amz-Algorithm') ? presigned(query, now) : inHeader(request, now)
  const [accessKeyId, ...scopeParts] = claim.credential.split('/')
  const scope = scopeParts.join('/')
  const [date, scopeRegion, service, end] = scopeParts
  if (scopeParts.length !== 4 || end !== 'aws4_request' || service !== 's3')
    throw claim.malformed('The credential must end with /<date>/<region>/s3/aws4_request.')
  if (scopeRegion !== region) throw claim.malformed(`The region '${scopeRegion}' is wrong; expecting '${region}'`)
  if (date !== claim.amzDate.slice(0, 8)) throw claim.malformed('Invalid credential date: not that of X-Amz-Date.')
  if (accessKeyId !== credentials.accessKeyId)
    throw new S3Error('InvalidAccessKeyId', 403, 'The AWS Access Key Id you provided does not exist in our records.', {
      AWSAccessKeyId: accessKeyId ?? '',
    })
  if (!claim.signedHeaders.includes('host')) throw claim.malformed('The host header must be signed.')
  const unsigned = Object.keys(request.headers).filter(
    (name) => name.startsWith('x-amz-') && !claim.signedHeaders.includes(name),
  )
  if (unsigned.length > 0)
    throw accessDenied('There were headers present in the request which were not signed', {
      HeadersNotSigned: unsigned.join(', '),
    })

  const key = signingKey(credentials.secretAccessKey, scope)
  const canonical = canonicalRequest(request, claim.signedHeaders, claim.payload)
  const text = stringToSign(claim.amzDate, scope, canonical)
  if (!sameText(sign(key, text), claim.signature))
    throw new S3Error(
      'SignatureDoesNotMatch',
      403,
      'The request signature we calculated does not match the signature you provided. Check your key and signing method.',
      {
        AWSAccessKeyId: accessKeyId,
        StringToSign: text,
        SignatureProvided: claim.signature,
        CanonicalRequest: canonical,
      },
    )
  return { payload: claim.payload, amzDate: claim.amzDate, scope, key, signature: claim.signature }
}

function inHeader(request: SignedRequest, now: Date): Claim {
  const authorization = headerValue(request, 'authorization')
  if (!authorization) throw accessDenied()
  const malformed = (message: string) =>
    new S3Error('AuthorizationHeaderMalformed', 400, `The authorization header is malformed; ${message}`)
  if (!authorization.startsWith('AWS4-HMAC-SHA256 '))
    throw invalidRequest('The authorization mechanism you have provided is not supported. Please use AWS4-HMAC-SHA256.')
  const fields = new Map(
    authorization
      .slice('AWS4-HMAC-SHA256 '.length)
      .split(',')
      .map((part) => part.trim().split('=') as [string, string]),
  )
  const [credential, signedHeaders, signature] = ['Credential', 'SignedHeaders', 'Signature'].map((n) => fields.get(n))
  if (!credential || !signedHeaders || !signature)
    throw malformed('it needs a Credential, SignedHeaders and a Signature.')
  const payload = headerValue(request, 'x-amz-content-sha256')
  if (!payload) throw invalidRequest('Missing required header for this request: x-amz-content-sha256')
  const amzDate = headerValue(request, 'x-amz-date') ?? ''
  const time = parseAmzDate(amzDate)
  if (!time) throw accessDenied('AWS authentication requires a valid Date or x-amz-date header')
  if (Math.abs(now.getTime() - time.getTime()) > skewMs)
    throw new S3Error(
      'RequestTimeTooSkewed',
      403,
      'The difference between the request time and the current time is too large.',
      { RequestTime: amzDate, ServerTime: now.toISOString(), MaxAllowedSkewMilliseconds: String(skewMs) },
    )
  return { credential, signedHeaders: signedHeaders.split(';'), signature, amzDate, payload, malformed }
}

function presigned(query: ReadonlyMap<string, string>, now: Date): Claim {
  const malformed = (message: string) => new S3Error('AuthorizationQueryParametersError', 400, message)
  const need = (name: string) => {
    const value = query.get(name)
    if (!value)
      throw malformed(
        'Query-string authentication version 4 requires the X-Amz-Algorithm, X-Amz-Credential, X-Amz-Signature, X-Amz-Date, X-Amz-SignedHeaders, and X-Amz-Expires parameters.',
      )
    return value
  }
  if (need('X-Amz-Algorithm') !== 'AWS4-HMAC-SHA256')
    throw malformed('X-Amz-Algorithm only supports "AWS4-HMAC-SHA256"')
  const amzDate = need('X-Amz-Date')
  const time = parseAmzDate(amzDate)
  if (!time) throw malformed("X-Amz-Date must be in the ISO8601 Long Format \"yyyyMMdd'T'HHmmss'Z'\"")
  const expires = Number(need('X-Amz-Expires'))
  if (!Number.isInteger(expires) || expires < 1 || expires > week)
    throw malformed('X-Amz-Expires must be a whole number of seconds from 1 to 604800 (a week)')
  const end = time.getTime() + expires * 1000
  if (now.getTime() >= end)
    throw accessDenied('Request has expired', {
      'X-Amz-Expires': String(expires),
      Expires: new Date(end).toISOString(),
      ServerTime: now.toISOString(),
    })
  if (time.getTime() - now.getTime() > skewMs) throw accessDenied('Request is not yet valid')
  return {
    credential: need('X-Amz-Credential'),
    signedHeaders: need('X-Amz-SignedHeaders').split(';'),
    signature: need('X-Amz-Signature'),
    amzDate,
    payload: query.get('X-Amz-Content-Sha256') ?? 'UNSIGNED-PAYLOAD',
    malformed,
  }
}

/** SHA-256 check of a small body that has been read whole (XML documents). */
export function checkPayload(authenticated: Authenticated, body: Uint8Array): void {
  if (/^[0-9a-f]{64}$/.test(authenticated.payload) && sha256Hex(body) !== authenticated.payload)
    throw payloadMismatch(authenticated.payload, sha256Hex(body))
}

export const payloadMismatch = (claimed: string, computed: string) =>
  new S3Error(
    'XAmzContentSHA256Mismatch',
    400,
    "The provided 'x-amz-content-sha256' header does not match what was computed.",
    { ClientComputedContentSHA256: claimed, S3ComputedContentSHA256: computed },
  )
