import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { ByteSource, ByteTransform } from '#shared/archive/byte-source.ts'
import { inflateInJavaScript } from '#shared/archive/codec.ts'
import { crc32 as crc32InJavaScript } from '#shared/archive/crc32.ts'
import type { MembersSource } from '#shared/archive/members-source.ts'
import { type DirectoryEntry, readDirectory } from '#shared/archive/zip-directory.ts'
import type { PackedZipMember } from '#shared/archive/zip-writer.ts'
import { CHUNK_LENGTH, STORED } from '#shared/archive/zip-format.ts'

export interface ZipReaderOptions {
  /**
   * Raw inflate; plain JavaScript where none is given. Must throw on damaged bytes, on an early end and on bytes behind
   * the last block, and yield as it goes.
   */
  readonly inflate?: ByteTransform
  /** CRC-32 of bytes after others of a CRC; plain JavaScript where none is given. */
  readonly crc32?: (bytes: Uint8Array, previous: number) => number
}

/** A zip as a source of members, which can also give them as they are packed. */
export interface ZipSource extends MembersSource {
  /** A member to be copied into another zip without unpacking it. Its CRC is stated, not checked. */
  packed(name: string): PackedZipMember
}

/**
 * Opens a proof archive as a source of members. The archive is hostile input: see readDirectory for what is refused at
 * once, and MembersSource for what shows only while a member is read (its compression, size and CRC).
 */
export async function openZip(source: ByteSource, options: ZipReaderOptions = {}): Promise<ZipSource> {
  const entries = new Map((await readDirectory(source)).map((entry) => [entry.name, entry]))
  const find = (name: string) => {
    const entry = entries.get(name)
    if (!entry) throw new ArchiveError('member-missing', name, `The archive has no ${name}.`)
    return entry
  }
  return {
    names: [...entries.keys()],
    size: (name) => find(name).unpacked,
    open: (name) => unpack(source, find(name), options),
    packed: (name) => {
      const entry = find(name)
      const { crc, packed, unpacked } = entry
      const method = entry.method === STORED ? 'stored' : 'deflated'
      return { name, method, crc, packed, unpacked, openPacked: () => readChunks(source, entry) }
    },
  }
}

async function* unpack(
  source: ByteSource,
  entry: DirectoryEntry,
  options: ZipReaderOptions,
): AsyncGenerator<Uint8Array, void, undefined> {
  const packed = readChunks(source, entry)
  const { inflate = inflateInJavaScript, crc32 = crc32InJavaScript } = options
  let crc = 0
  let size = 0
  try {
    for await (const chunk of entry.method === STORED ? packed : inflate(packed)) {
      size += chunk.length
      if (size > entry.unpacked) throw sizeDiffers(entry)
      crc = crc32(chunk, crc)
      yield chunk
    }
  } catch (error) {
    if (error instanceof ArchiveError && error.member === null) {
      throw new ArchiveError(error.code, entry.name, `${entry.name}: ${error.message}`)
    }
    throw error
  }
  if (size !== entry.unpacked) throw sizeDiffers(entry)
  if (crc !== entry.crc) {
    throw new ArchiveError('member-crc', entry.name, `${entry.name} is damaged: its check sum (CRC-32) differs.`)
  }
}

async function* readChunks(source: ByteSource, entry: DirectoryEntry): AsyncGenerator<Uint8Array> {
  for (let done = 0; done < entry.packed; done += CHUNK_LENGTH) {
    yield await source.read(entry.dataOffset + done, Math.min(CHUNK_LENGTH, entry.packed - done))
  }
}

function sizeDiffers(entry: DirectoryEntry): ArchiveError {
  return new ArchiveError('member-size', entry.name, `${entry.name} does not unpack to the size that the zip states.`)
}
