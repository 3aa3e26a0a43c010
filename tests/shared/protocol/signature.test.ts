import { createPublicKey, generateKeyPairSync, sign as nodeSign, verify as nodeVerify } from 'node:crypto'
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import {
  decodePem,
  decodeSpki,
  encodePem,
  encodeSpki,
  isSoundPublicKey,
  keyFingerprint,
  publicKeyOf,
  signBytes,
  verifySignature,
} from '#shared/protocol/signature.ts'

// Debian python3-cryptography-vectors, Ed25519/sign.input: lines 1, 2, 3 and 1024 are RFC 8032 section 7.1.
const lines = readFileSync(join(import.meta.dirname, '../../outside/ed25519_sign_input_first32.txt'), 'utf8')
  .split('\n')
  .filter((line) => /^[0-9a-f]/.test(line))
  .map((line) => line.split(':') as [string, string, string, string])

describe('Ed25519', () => {
  test('keys, signatures and their refusal when anything is changed (RFC 8032 section 7.1 and ed25519.cr.yp.to)', () => {
    expect(lines.length).toBeGreaterThan(30)
    for (const [secretAndKey, key, message, signed] of lines) {
      const secret = hexBytes(secretAndKey.slice(0, 64))
      const publicKey = hexBytes(key)
      const bytes = hexBytes(message)
      const signature = hexBytes(signed.slice(0, 128))
      expect(toHex(publicKeyOf(secret))).toBe(key)
      expect(toHex(signBytes(secret, bytes))).toBe(toHex(signature))
      expect(verifySignature(publicKey, bytes, signature)).toBe(true)
      const bad = signature.slice()
      bad[0] = (bad[0] as number) ^ 1
      expect(verifySignature(publicKey, bytes, bad)).toBe(false)
      expect(verifySignature(publicKey, utf8(`${message}!`), signature)).toBe(false)
    }
  })

  test('S + L, the same signature in another spelling, is refused (RFC 8032 section 5.1.7)', () => {
    const [, key, message, signed] = lines[0] as [string, string, string, string]
    const signature = hexBytes(signed.slice(0, 128))
    const order = 2n ** 252n + 27742317777372353535851937790883648493n
    let s = 0n
    for (let i = 63; i >= 32; i -= 1) s = (s << 8n) | BigInt(signature[i] as number)
    s += order
    for (let i = 32; i < 64; i += 1) {
      signature[i] = Number(s & 0xffn)
      s >>= 8n
    }
    expect(verifySignature(hexBytes(key), hexBytes(message), signature)).toBe(false)
  })

  // The eight points of small order and their non-canonical spellings (Chalkias, Garillot, Nikolaenko, "Taming the many
  // EdDSAs", 2020, table 1; from memory).
  test.each([
    '0100000000000000000000000000000000000000000000000000000000000000',
    'ecffffffffffffffffffffffffffffffffffffffffffffffffffffffffffff7f',
    '0000000000000000000000000000000000000000000000000000000000000080',
    '0000000000000000000000000000000000000000000000000000000000000000',
    'c7176a703d4dd84fba3c0b760d10670f2a2053fa2c39ccc64ec7fd7792ac037a',
    'c7176a703d4dd84fba3c0b760d10670f2a2053fa2c39ccc64ec7fd7792ac03fa',
    '26e8958fc2b227b045c3f489f2ef98f0d5dfac05d3c63339b13802886d53fc05',
    '26e8958fc2b227b045c3f489f2ef98f0d5dfac05d3c63339b13802886d53fc85',
    '0100000000000000000000000000000000000000000000000000000000000080',
    'ecffffffffffffffffffffffffffffffffffffffffffffffffffffffffffffff',
    'eeffffffffffffffffffffffffffffffffffffffffffffffffffffffffffff7f',
    'edffffffffffffffffffffffffffffffffffffffffffffffffffffffffffff7f',
    'ffffffffffffffffffffffffffffffffffffffffffffffffffffffffffffffff',
  ])('key %s may not sign', (key) => {
    expect(isSoundPublicKey(hexBytes(key))).toBe(false)
    // R at infinity and S = 0 "verify" for every message under a small-order key in lenient libraries.
    const lenient = hexBytes(`01${'00'.repeat(63)}`)
    expect(verifySignature(hexBytes(key), utf8('anything'), lenient)).toBe(false)
  })

  test('signatures pass between Node (OpenSSL) and the core both ways', () => {
    const { privateKey, publicKey } = generateKeyPairSync('ed25519')
    const raw = decodeSpki(publicKey.export({ type: 'spki', format: 'der' })) as Uint8Array
    const message = utf8('two hundred and eleven tickets')
    expect(verifySignature(raw, message, nodeSign(null, message, privateKey))).toBe(true)
    const secret = new Uint8Array(32).fill(7)
    const ours = createPublicKey({ key: Buffer.from(encodeSpki(publicKeyOf(secret))), format: 'der', type: 'spki' })
    expect(nodeVerify(null, message, ours, signBytes(secret, message))).toBe(true)
  })

  test.each([0, 63, 65])('a signature of %s bytes is refused', (length) => {
    expect(verifySignature(publicKeyOf(new Uint8Array(32)), utf8('x'), new Uint8Array(length))).toBe(false)
  })
})

describe('the site key', () => {
  const key = publicKeyOf(new Uint8Array(32).fill(1))
  const pem = encodePem(key)
  test('is written as OpenSSL writes it, and read back', () => {
    const exported = createPublicKey(pem).export({ type: 'spki', format: 'pem' })
    expect(pem).toBe(exported)
    expect(decodePem(utf8(pem))).toEqual(key)
    expect(keyFingerprint(sha256, key)).toBe(toHex(sha256(encodeSpki(key))))
  })
  test.each([
    ['no line feed at the end', pem.trimEnd()],
    ['one too many', `${pem}\n`],
    ['carriage returns', pem.replaceAll('\n', '\r\n')],
    ['text before it', `key\n${pem}`],
    ['another label', pem.replaceAll('PUBLIC', 'PRIVATE')],
    ['a broken line', pem.replace('MCow', 'MC\now')],
    ['missing padding', pem.replace('=\n', '\n')],
    ['another algorithm', pem.replace('MCowBQYDK2Vw', 'MCowBQYDK2Vu')],
    ['nothing', ''],
  ])('with %s is refused', (_, text) => {
    expect(text === pem).toBe(false)
    expect(decodePem(utf8(text))).toBeNull()
  })
})
