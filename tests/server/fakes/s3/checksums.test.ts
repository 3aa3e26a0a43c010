import { describe, expect, it } from 'vitest'
import { type ChecksumAlgorithm, compositeChecksum, createChecksum } from '#server/fakes/s3/checksums.ts'

/**
 * "123456789" under each: CRC check values of the "Catalogue of parametrised CRC algorithms" (CRC-32/ISO-HDLC,
 * CRC-32/ISCSI, CRC-64/NVME; from memory), "abc" under SHA-1 and SHA-256: FIPS 180-4 examples.
 */
const known: [ChecksumAlgorithm, string, string][] = [
  ['CRC32', '123456789', 'cbf43926'],
  ['CRC32C', '123456789', 'e3069283'],
  ['CRC64NVME', '123456789', 'ae8b14860a799888'],
  ['SHA1', 'abc', 'a9993e364706816aba3e25717850c26c9cd0d89d'],
  ['SHA256', 'abc', 'ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad'],
]

describe('createChecksum', () => {
  it.each(known)('%s gives its published value, whole and in pieces', async (algorithm, text, hex) => {
    for (const cut of [0, 1, text.length]) {
      const checksum = await createChecksum(algorithm)
      checksum.update(Buffer.from(text.slice(0, cut)))
      checksum.update(Buffer.from(text.slice(cut)))
      expect(Buffer.from(checksum.digest(), 'base64').toString('hex')).toBe(hex)
    }
  })

  it('keeps two running checksums of one kind apart', async () => {
    const [a, b] = [await createChecksum('CRC32C'), await createChecksum('CRC32C')]
    a.update(Buffer.from('12345'))
    b.update(Buffer.from('something else'))
    a.update(Buffer.from('6789'))
    expect(Buffer.from(a.digest(), 'base64').toString('hex')).toBe('e3069283')
  })

  it('builds a composite from the bytes of the parts, with their number', async () => {
    // SHA-256 of the 32 zero bytes twice is a published value (64 zero bytes): f5a5fd42….
    const zero = Buffer.alloc(32).toString('base64')
    expect(await compositeChecksum('SHA256', [zero, zero])).toBe(
      `${Buffer.from('f5a5fd42d16a20302798ef6ed309979b43003d2320d9f0e8ea9831a92759fb4b', 'hex').toString('base64')}-2`,
    )
  })
})
