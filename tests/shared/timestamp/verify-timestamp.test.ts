import { createHash, X509Certificate } from 'node:crypto'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import fc from 'fast-check'
import { certificatesOfPem } from '#shared/timestamp/certificate.ts'
import {
  DEVELOPMENT_AUTHORITY,
  DEVELOPMENT_AUTHORITY_PEM,
  refuseTimestamp,
  signDevelopmentTimestamp,
} from '#shared/timestamp/development-authority.ts'
import { parseTimestampRequest, timestampRequest } from '#shared/timestamp/request.ts'
import { parseTimestampResponse } from '#shared/timestamp/token.ts'
import { verifyTimestamp } from '#shared/timestamp/verify-timestamp.ts'
import {
  type AuthorityKey,
  type AuthorityOptions,
  makeOpensslAuthority,
  type OpensslAuthority,
  opensslVerifies,
} from '#tests/support/timestamp/openssl-authority.ts'

const DATA = new TextEncoder().encode('{"kind":"seal"}')
const sha256 = (bytes: Uint8Array) => new Uint8Array(createHash('sha256').update(bytes).digest())
const IMPRINT = sha256(DATA)
/** 2026-03-04T05:06:07Z, by `date -u -d @…`. */
const TIME = 1772600767

const request = { imprint: IMPRINT, nonce: Uint8Array.of(0x80, 1, 2), certificates: true }

describe('timestamps of the development authority', () => {
  const response = signDevelopmentTimestamp(request, TIME, 77)

  it('OpenSSL verifies them, and refuses them over other data', () => {
    expect(opensslVerifies(DATA, response, DEVELOPMENT_AUTHORITY_PEM)).toBe(true)
    expect(opensslVerifies(new TextEncoder().encode('{"kind":"seal"} '), response, DEVELOPMENT_AUTHORITY_PEM)).toBe(
      false,
    )
  })
  it('we verify them too, with the second that they state', () => {
    const found = verifyTimestamp(response, {
      imprint: IMPRINT,
      trusted: [DEVELOPMENT_AUTHORITY],
      nonce: request.nonce,
    })
    expect(found).toMatchObject({
      ok: true,
      value: {
        info: { genTime: TIME, latest: TIME + 1, serial: '4d' },
        signer: { name: 'Development timestamps - worthless' },
        trustedBy: { name: 'Development authority - worthless' },
      },
    })
  })
  it('are nobody’s, where the authority is not trusted', () => {
    expect(verifyTimestamp(response, { imprint: IMPRINT, trusted: [] })).toMatchObject({
      ok: true,
      value: { trustedBy: null },
    })
  })
  it('answer one request and no other', () => {
    const asked = { imprint: IMPRINT, trusted: [], nonce: Uint8Array.of(0x80, 1, 3) }
    expect(verifyTimestamp(response, asked)).toMatchObject({ ok: false, error: { code: 'timestamp-nonce' } })
    const other = { imprint: sha256(IMPRINT), trusted: [] }
    expect(verifyTimestamp(response, other)).toMatchObject({ ok: false, error: { code: 'timestamp-imprint' } })
  })
  it('are nothing before the certificate’s first second', () => {
    const early = signDevelopmentTimestamp(request, 1577836799, 1)
    expect(verifyTimestamp(early, { imprint: IMPRINT, trusted: [DEVELOPMENT_AUTHORITY] })).toMatchObject({
      ok: false,
      error: { code: 'timestamp-expired' },
    })
  })
  it('a refusal is told with its words', () => {
    expect(verifyTimestamp(refuseTimestamp('Closed on Sundays.'), { imprint: IMPRINT, trusted: [] })).toMatchObject({
      ok: false,
      error: { code: 'timestamp-refused', message: expect.stringContaining('Closed on Sundays.') },
    })
  })
  it('a changed byte anywhere is refused, or changes nothing that is believed', () => {
    const asked = { imprint: IMPRINT, trusted: [DEVELOPMENT_AUTHORITY] }
    const whole = verifyTimestamp(response, asked)
    if (!whole.ok) throw new Error('not ok')
    let refused = 0
    for (let at = 0; at < response.length; at += 1) {
      const changed = response.slice()
      changed[at] = (changed[at] ?? 0) ^ 0x01
      const found = verifyTimestamp(changed, asked)
      if (!found.ok || found.value.trustedBy === null) refused += 1
      else expect(found.value.info).toEqual(whole.value.info)
    }
    // What is not signed: the status, the version numbers, and the list of digests before the content.
    expect(response.length - refused).toBeLessThan(30)
  })
})

describe('requests', () => {
  it('are read by OpenSSL as they were meant, and by us', () => {
    expect(parseTimestampRequest(timestampRequest(request))).toEqual({
      ...request,
      nonce: Uint8Array.of(0, 0x80, 1, 2),
    })
  })
})

describe.each<[AuthorityKey, AuthorityOptions]>([
  ['rsa', { digest: 'sha256' }],
  ['rsa', { digest: 'sha512', named: 'sha1' }],
  ['p256', { digest: 'sha256' }],
  ['p384', { digest: 'sha384' }],
])('timestamps of an authority run by OpenSSL: %s %j', (key, options) => {
  let authority: OpensslAuthority
  beforeAll(() => {
    authority = makeOpensslAuthority(key, options)
  })
  afterAll(() => authority.close())

  it('lead to the root through the authority between', () => {
    const response = authority.reply(DATA)
    const [root] = certificatesOfPem(authority.root)
    const now = Math.floor(Date.now() / 1000)
    const found = verifyTimestamp(response, { imprint: IMPRINT, trusted: certificatesOfPem(authority.root) })
    expect(found).toMatchObject({ ok: true, value: { signer: { name: 'Throw-away signer' }, trustedBy: root } })
    if (!found.ok) return
    expect(Math.abs(found.value.info.genTime - now)).toBeLessThan(10)
    // Accuracy 1.5001 s, upwards.
    expect(found.value.info.latest).toBe(found.value.info.genTime + 2)
    expect(verifyTimestamp(response, { imprint: IMPRINT, trusted: [DEVELOPMENT_AUTHORITY] })).toMatchObject({
      ok: true,
      value: { trustedBy: null },
    })
  })
  it('are trusted by the signer’s own certificate as well, in the answer or not', () => {
    const trusted = certificatesOfPem(authority.signer)
    for (const certificates of [true, false]) {
      const response = authority.reply(DATA, { certificates })
      expect(verifyTimestamp(response, { imprint: IMPRINT, trusted })).toMatchObject({
        ok: true,
        value: { trustedBy: { name: 'Throw-away signer' } },
      })
    }
    expect(
      verifyTimestamp(authority.reply(DATA, { certificates: false }), { imprint: IMPRINT, trusted: [] }),
    ).toMatchObject({ ok: false, error: { code: 'timestamp-certificate' } })
  })
  it('answer our own requests', () => {
    const response = authority.answer(timestampRequest(request))
    const asked = { imprint: IMPRINT, trusted: certificatesOfPem(authority.root), nonce: request.nonce }
    expect(verifyTimestamp(response, asked)).toMatchObject({
      ok: true,
      value: { trustedBy: { name: 'Throw-away root' } },
    })
  })
  it('are read as Node reads their certificates', () => {
    const answer = parseTimestampResponse(authority.reply(DATA))
    if (answer.kind !== 'granted') throw new Error('refused')
    const known = answer.token.certificates.map((bytes) => new X509Certificate(bytes).subject)
    expect(known.sort()).toEqual([
      'O=Throw-away tests\nCN=Throw-away middle',
      'O=Throw-away tests\nCN=Throw-away signer',
    ])
  })
  it('are refused once a byte of what is signed is changed', () => {
    const response = authority.reply(DATA)
    const answer = parseTimestampResponse(response)
    if (answer.kind !== 'granted') throw new Error('refused')
    const { content, signer } = answer.token
    const asked = { imprint: IMPRINT, trusted: certificatesOfPem(authority.root) }
    const at = (part: Uint8Array) => Buffer.from(response).indexOf(Buffer.from(part))
    for (const [part, codes] of [
      [content.subarray(content.length - 3), ['timestamp-attributes', 'timestamp-malformed']],
      [signer.signature.subarray(signer.signature.length - 20), ['timestamp-signature']],
    ] as const) {
      const changed = response.slice()
      const index = at(part)
      changed[index] = (changed[index] ?? 0) ^ 0x04
      const found = verifyTimestamp(changed, asked)
      expect(found.ok ? 'ok' : found.error.code).toBeOneOf([...codes])
    }
  })
})

describe('certificates that may not sign timestamps', () => {
  /** The same time over the same data, as one that OpenSSL's own authority would not sign. */
  const info = () => {
    const answer = parseTimestampResponse(signDevelopmentTimestamp(request, Math.floor(Date.now() / 1000) + 60, 5))
    if (answer.kind !== 'granted') throw new Error('refused')
    return answer.token.content
  }
  const found = (options: AuthorityOptions, named = true) => {
    const authority = makeOpensslAuthority('p256', options)
    try {
      const trusted = certificatesOfPem(authority.root)
      return verifyTimestamp(authority.signAnyway(info(), { named }), { imprint: IMPRINT, trusted })
    } finally {
      authority.close()
    }
  }
  it('one that is for timestamps passes, signed in the same way', () => {
    expect(found({})).toMatchObject({ ok: true, value: { trustedBy: { name: 'Throw-away root' } } })
  })
  it('one that the signed attributes do not name is refused', () => {
    expect(found({}, false)).toMatchObject({
      ok: false,
      error: { code: 'timestamp-attributes', at: 'signingCertificate' },
    })
  })
  it.each<AuthorityOptions>([
    { extensions: 'not-critical' },
    { extensions: 'two-purposes' },
    { extensions: 'not-for-signatures' },
  ])('%j is refused', (options) => {
    expect(found(options)).toMatchObject({ ok: false, error: { code: 'timestamp-certificate' } })
  })
  it('one issued by somebody who is no authority is nobody’s', () => {
    expect(found({ middle: 'signer' })).toMatchObject({ ok: true, value: { trustedBy: null } })
  })
})

describe('bytes of strangers', () => {
  it('never throw, and never pass', () => {
    const asked = { imprint: IMPRINT, trusted: [DEVELOPMENT_AUTHORITY] }
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 300 }), (bytes) => verifyTimestamp(bytes, asked).ok === false),
      { numRuns: 500 },
    )
  })
  it('thousands of nested sequences cost nothing', () => {
    let nested: Uint8Array = new Uint8Array(0)
    for (let i = 0; i < 2000; i += 1) {
      const { length } = nested
      const head = length < 128 ? [0x30, length] : [0x30, 0x82, length >> 8, length & 0xff]
      if (length + 4 > 60_000) break
      nested = Uint8Array.from([...head, ...nested])
    }
    expect(verifyTimestamp(nested, { imprint: IMPRINT, trusted: [] })).toMatchObject({
      ok: false,
      error: { code: 'timestamp-malformed' },
    })
  })
  it('more than 64 KiB are not looked at', () => {
    const long = new Uint8Array(70_000)
    long.set([0x30, 0x83, 1, 0x11, 0x6b])
    expect(verifyTimestamp(long, { imprint: IMPRINT, trusted: [] })).toMatchObject({
      ok: false,
      error: { message: 'A timestamp has at most 65536 bytes.' },
    })
  })
})
