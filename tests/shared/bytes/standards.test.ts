import { createHmac as nodeHmac, hkdfSync } from 'node:crypto'
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { sha256 as nobleSha256 } from '@noble/hashes/sha2.js'
import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { createHmac, hkdfSha256, hmacSha256 } from '#shared/bytes/hashing.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'

const outside = (name: string): string => readFileSync(join(import.meta.dirname, '../../outside', name), 'utf8')
/** Blocks of `Name = value` lines, as the NIST and RFC vector files are written. */
function blocks(text: string, last: string): Record<string, string>[] {
  const found: Record<string, string>[] = []
  let block: Record<string, string> = {}
  for (const line of text.split(/\r?\n/)) {
    const match = /^(\w+)\s*=\s*(.*)$/.exec(line)
    if (match === null) continue
    block[match[1] as string] = (match[2] as string).trim()
    if (match[1] === last) {
      found.push(block)
      block = {}
    }
  }
  return found
}

describe.each([
  ['node', sha256],
  ['noble', nobleSha256],
])('the %s hash under everything', (_, hash) => {
  test('SHA-256 agrees with the NIST CAVS short messages (FIPS 180-4; SHA256ShortMsg.rsp)', () => {
    const cases = blocks(outside('nist_sha256_short.txt'), 'MD')
    expect(cases.length).toBeGreaterThan(60)
    for (const { Len, Msg, MD } of cases) {
      expect(toHex(hash(hexBytes((Msg as string).slice(0, Number(Len) / 4))))).toBe(MD)
    }
  })

  test('HMAC agrees with RFC 4231', () => {
    const cases = blocks(outside('rfc4231_hmac_sha256.txt'), 'MD')
    expect(cases.length).toBe(6)
    const hmac = createHmac(hash)
    for (const { Key, Msg, MD } of cases) {
      expect(toHex(hmac(hexBytes(Key as string), hexBytes(Msg as string)))).toBe(MD)
    }
  })

  test('HKDF agrees with RFC 5869 appendix A.1 to A.3', () => {
    const cases = blocks(outside('rfc5869_hkdf_sha256.txt'), 'OKM')
    expect(cases.length).toBe(3)
    for (const c of cases) {
      const [ikm, salt, info] = [c.IKM, c.salt, c.info].map((hex) => hexBytes(hex as string)) as [
        Uint8Array,
        Uint8Array,
        Uint8Array,
      ]
      expect(toHex(hmacSha256(hash, salt, ikm))).toBe(c.PRK)
      expect(toHex(hkdfSha256(hash, { salt, ikm, info, length: Number(c.L) }))).toBe(c.OKM)
    }
  })
})

test('HMAC and HKDF agree with Node for keys and messages of any length, one after the other', () => {
  const hmac = createHmac(sha256)
  const bytes = fc.uint8Array({ maxLength: 300 })
  fc.assert(
    fc.property(bytes, bytes, bytes, fc.integer({ min: 1, max: 200 }), (key, message, info, length) => {
      expect(toHex(hmac(key, message))).toBe(nodeHmac('sha256', key).update(message).digest('hex'))
      const okm = hkdfSha256(sha256, { salt: key, ikm: message, info, length })
      expect(toHex(okm)).toBe(Buffer.from(hkdfSync('sha256', message, key, info, length)).toString('hex'))
    }),
    { seed: 7 },
  )
})

test.each([0, 8161, 1.5, Number.NaN])('HKDF refuses a length of %s', (length) => {
  const empty = new Uint8Array(0)
  expect(() => hkdfSha256(sha256, { salt: empty, ikm: empty, info: empty, length })).toThrow(RangeError)
})
