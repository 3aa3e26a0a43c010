import { describe, expect, it } from 'vitest'
import { gcmOpen, gcmSeal } from '#server/adapters/encryption/aes-gcm.ts'
import { createSecretBox, type EncryptionKey, SecretError } from '#server/adapters/encryption/secret-box.ts'

const hex = (text: string) => new Uint8Array(Buffer.from(text, 'hex'))

describe('AES-256-GCM', () => {
  // McGrew and Viega, "The Galois/Counter Mode of Operation", appendix B, test case 16 (from memory; a wrong digit
  // anywhere would not fit the tag).
  const input = {
    key: hex('feffe9928665731c6d6a8f9467308308feffe9928665731c6d6a8f9467308308'),
    nonce: hex('cafebabefacedbaddecaf888'),
    associated: hex('feedfacedeadbeeffeedfacedeadbeefabaddad2'),
  }
  const plaintext = hex(
    'd9313225f88406e5a55909c5aff5269a86a7a9531534f7da2e4c303d8a318a721c3c0c95956809532fcf0e2449a6b525b16aedf5aa0de657ba637b39',
  )
  const sealed = hex(
    '522dc1f099567d07f47f37a32a84427d643a8cdcbfe5c0c97598a2bd2555d1aa8cb08e48590dbb3da7b08b1056828838c5f61e6393ba7a0abcc9f66276fc6ece0f4e1768cddf8853bb2d551b',
  )

  it('gives the published ciphertext and tag, and reads them', () => {
    expect(gcmSeal(input, plaintext)).toEqual(sealed)
    expect(gcmOpen(input, sealed)).toEqual(plaintext)
  })

  it('refuses any changed bit, a shorter tag and other associated data', () => {
    for (let at = 0; at < sealed.length; at++) {
      const changed = Uint8Array.from(sealed)
      changed[at] = (changed[at] ?? 0) ^ 1
      expect(gcmOpen(input, changed)).toBeUndefined()
    }
    expect(gcmOpen(input, sealed.subarray(0, sealed.length - 1))).toBeUndefined()
    expect(gcmOpen(input, sealed.subarray(0, 5))).toBeUndefined()
    expect(gcmOpen({ ...input, associated: hex('feed') }, sealed)).toBeUndefined()
  })
})

const key = (id: string, fill: number): EncryptionKey => ({ id, key: new Uint8Array(32).fill(fill) })
const secret = new Uint8Array([1, 2, 3, 4])

const codeOf = (act: () => unknown) => {
  try {
    act()
  } catch (error) {
    return error instanceof SecretError ? error.code : error
  }
  return 'opened'
}

describe('the secret box', () => {
  const box = createSecretBox([key('k1', 1)])

  it('opens what it sealed, and never seals twice alike', () => {
    const [one, two] = [box.seal(secret, 'seal-seed:7'), box.seal(secret, 'seal-seed:7')]
    expect(box.open(one, 'seal-seed:7')).toEqual(secret)
    expect(one).not.toEqual(two)
    expect(box.open(box.seal(new Uint8Array(), 'empty'), 'empty')).toEqual(new Uint8Array())
    expect(Buffer.from(one).includes(Buffer.from(secret))).toBe(false)
  })

  it('does not open a secret in the place of another', () => {
    const sealed = box.seal(secret, 'seal-seed:7')
    expect(codeOf(() => box.open(sealed, 'seal-seed:8'))).toBe('refused')
    expect(codeOf(() => box.open(sealed, 'blinding-key:7'))).toBe('refused')
  })

  it('opens secrets of older keys after a change of keys, and says which to seal anew', () => {
    const old = box.seal(secret, 'x')
    const rotated = createSecretBox([key('k2', 2), key('k1', 1)])
    const fresh = rotated.seal(secret, 'x')
    expect([rotated.open(old, 'x'), rotated.open(fresh, 'x')]).toEqual([secret, secret])
    expect([rotated.isOld(old), rotated.isOld(fresh)]).toEqual([true, false])
    expect(codeOf(() => box.open(fresh, 'x'))).toBe('unknown-key')
    expect(() => box.open(fresh, 'x')).toThrow('"k2"')
  })

  it('refuses a secret whose key id was changed to another known one, and another key under the same id', () => {
    const sealed = createSecretBox([key('k2', 2)]).seal(secret, 'x')
    const relabelled = Uint8Array.from(sealed)
    relabelled[3] = '1'.charCodeAt(0)
    // Even where both ids hold the same key: the id is bound too.
    expect(codeOf(() => createSecretBox([key('k1', 2), key('k2', 2)]).open(relabelled, 'x'))).toBe('refused')
    expect(codeOf(() => createSecretBox([key('k2', 3)]).open(sealed, 'x'))).toBe('refused')
  })

  it('calls other bytes malformed', () => {
    const sealed = box.seal(secret, 'x')
    for (const bytes of [
      new Uint8Array(),
      sealed.subarray(0, 20),
      Uint8Array.of(2, ...sealed.subarray(1)),
      Uint8Array.of(1, 0, ...sealed.subarray(2)),
    ])
      expect(codeOf(() => box.open(bytes, 'x'))).toBe('malformed')
  })

  it('takes no keys that would be confused or weak', () => {
    expect(() => createSecretBox([])).toThrow('must be an encryption key')
    expect(() => createSecretBox([key('k1', 1), key('k1', 2)])).toThrow('two encryption keys')
    expect(() => createSecretBox([{ id: 'k1', key: new Uint8Array(16) }])).toThrow('32 bytes; it has 16')
    expect(() => createSecretBox([key('K 1', 1)])).toThrow('must be a-z')
  })
})
