import { createHash } from 'node:crypto'
import { crc32 } from 'node:zlib'
import { createCRC32, createCRC64 } from 'hash-wasm'

/** Object checksums of the S3 API reference, "Checking object integrity". Values are base64. */
export const checksumAlgorithms = ['CRC32', 'CRC32C', 'CRC64NVME', 'SHA1', 'SHA256'] as const
export type ChecksumAlgorithm = (typeof checksumAlgorithms)[number]

export interface Checksum {
  update(data: Uint8Array): void
  /** The checksum of all the data, in base64; call it once. */
  digest(): string
}

export const checksumHeader = (algorithm: ChecksumAlgorithm) => `x-amz-checksum-${algorithm.toLowerCase()}`

export const algorithmOfHeader = (name: string): ChecksumAlgorithm | undefined =>
  checksumAlgorithms.find((algorithm) => checksumHeader(algorithm) === name.toLowerCase())

/** Bytes of each checksum before base64. */
export const checksumLength: Readonly<Record<ChecksumAlgorithm, number>> = {
  CRC32: 4,
  CRC32C: 4,
  CRC64NVME: 8,
  SHA1: 20,
  SHA256: 32,
}

export async function createChecksum(algorithm: ChecksumAlgorithm): Promise<Checksum> {
  switch (algorithm) {
    case 'CRC32': {
      let value = 0
      return {
        update: (data) => {
          value = crc32(data, value)
        },
        digest: () => {
          const bytes = Buffer.alloc(4)
          bytes.writeUInt32BE(value >>> 0)
          return bytes.toString('base64')
        },
      }
    }
    // The polynomials are in the reflected form: Castagnoli (RFC 3720 appendix B.4) and that of the NVMe base
    // specification (CRC-64/NVME).
    case 'CRC32C':
      return fromWasm(await createCRC32(0x82f63b78))
    case 'CRC64NVME':
      return fromWasm(await createCRC64('9a6c9329ac4bc9b5'))
    case 'SHA1':
    case 'SHA256': {
      const hash = createHash(algorithm.toLowerCase())
      return { update: (data) => void hash.update(data), digest: () => hash.digest('base64') }
    }
  }
}

function fromWasm(hash: {
  init(): unknown
  update(data: Uint8Array): unknown
  digest(form: 'binary'): Uint8Array
}): Checksum {
  hash.init()
  return {
    update: (data) => void hash.update(data),
    digest: () => Buffer.from(hash.digest('binary')).toString('base64'),
  }
}

/** The checksum of a multipart object whose type is COMPOSITE: that of its parts' checksums, with their number. */
export async function compositeChecksum(algorithm: ChecksumAlgorithm, parts: readonly string[]): Promise<string> {
  const whole = await createChecksum(algorithm)
  for (const part of parts) whole.update(Buffer.from(part, 'base64'))
  return `${whole.digest()}-${parts.length}`
}
