import { deflateRawSync } from 'node:zlib'
import { createSha256 } from '#server/adapters/archive/check-tools.ts'
import { crc32 } from '#shared/archive/crc32.ts'
import { proofMember, publicFromLocked, sumMember } from '#shared/archive/proof-archive.ts'
import { zipSize } from '#shared/archive/zip-size.ts'
import type { ZipSource } from '#shared/archive/zip-reader.ts'
import { type PackedZipMember, writeZip, type ZipMember } from '#shared/archive/zip-writer.ts'

export interface ProofZip {
  /** In bytes, exactly. */
  readonly size: number
  /** The zip's bytes, once. */
  readonly chunks: AsyncIterable<Uint8Array>
}

/**
 * The public proof archive: the locked one's members as they are packed, the labels of today, and the sums over all.
 * `digests` holds the SHA-256 of each locked member, in hex.
 */
export async function proofZip(
  locked: ZipSource,
  digests: ReadonlyMap<string, string>,
  labels: Uint8Array,
): Promise<ProofZip> {
  const summed = await sumMember(proofMember('labels.jsonl', labels), createSha256())
  const members: PackedZipMember[] = []
  for (const member of publicFromLocked(locked, digests, summed)) {
    members.push('openPacked' in member ? member : await packed(member))
  }
  return { size: zipSize(members), chunks: writeZip(members) }
}

/** Packs a member that is small enough for memory, so that its size is known beforehand. */
async function packed(member: ZipMember): Promise<PackedZipMember> {
  const chunks: Uint8Array[] = []
  for await (const chunk of member.open()) chunks.push(chunk)
  const bytes = Buffer.concat(chunks)
  const content = member.method === 'deflated' ? deflateRawSync(bytes, { level: 6 }) : bytes
  return {
    name: member.name,
    method: member.method,
    crc: crc32(bytes),
    packed: content.length,
    unpacked: bytes.length,
    async *openPacked() {
      if (content.length > 0) yield content
    },
  }
}
