import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { ByteTransform } from '#shared/archive/byte-source.ts'
import { deflateInJavaScript } from '#shared/archive/codec.ts'
import { crc32 } from '#shared/archive/crc32.ts'
import {
  checkMemberName,
  checkNameIsNew,
  DEFLATED,
  DIRECTORY_LENGTH,
  DIRECTORY_SIGNATURE,
  END_LENGTH,
  END_SIGNATURE,
  FIXED_DATE,
  FIXED_TIME,
  LOCAL_LENGTH,
  LOCAL_SIGNATURE,
  MAX_MEMBERS,
  MAX_UNPACKED,
  nameBytes,
  STORED,
  VERSION_NEEDED,
} from '#shared/archive/zip-format.ts'

/** A member to be written. `open` gives its bytes from the start each time: a stored member is read twice. */
export interface ZipMember {
  readonly name: string
  readonly method: 'stored' | 'deflated'
  open(): AsyncIterable<Uint8Array>
}

/**
 * A member whose packed bytes are at hand, from a zip that was read: they are copied, not packed again. Sizes in bytes;
 * `openPacked` must give exactly `packed` bytes that unpack to `unpacked` bytes of this CRC.
 */
export interface PackedZipMember {
  readonly name: string
  readonly method: 'stored' | 'deflated'
  readonly crc: number
  readonly packed: number
  readonly unpacked: number
  openPacked(): AsyncIterable<Uint8Array>
}

export interface ZipWriterOptions {
  /** Raw deflate; plain JavaScript where none is given. The same one gives the same archive, byte for byte. */
  readonly deflate?: ByteTransform
}

interface WrittenMember {
  readonly name: Uint8Array
  readonly method: number
  readonly crc: number
  readonly packed: number
  readonly unpacked: number
  readonly offset: number
}

/** A member of bytes in memory. */
export function bytesMember(name: string, bytes: Uint8Array, method: ZipMember['method'] = 'deflated'): ZipMember {
  return { name, method, open: () => oneChunk(bytes) }
}

/**
 * Writes the zip of PROTOCOL section 9, chunk by chunk, in the order given. Sizes and CRC stand in the local headers, so
 * that each compressed member is held in memory once, until it is written. Throws ArchiveError on a bad or doubled name,
 * or when the members pass 1 GiB.
 */
export async function* writeZip(
  members: readonly (ZipMember | PackedZipMember)[],
  options: ZipWriterOptions = {},
): AsyncGenerator<Uint8Array, void, undefined> {
  const seen = new Set<string>()
  for (const member of members) {
    checkMemberName(member.name)
    checkNameIsNew(member.name, seen)
  }
  if (members.length > MAX_MEMBERS) {
    throw new ArchiveError('zip-too-many-members', null, `An archive holds at most ${MAX_MEMBERS} members.`)
  }
  const written: WrittenMember[] = []
  let offset = 0
  let unpackedTotal = 0
  for (const member of members) {
    const room = MAX_UNPACKED - unpackedTotal
    const ready = 'openPacked' in member ? copied(member, room) : await pack(member, room, options)
    const name = nameBytes(member.name)
    const { crc, packed, unpacked } = ready
    const entry = { name, method: member.method === 'deflated' ? DEFLATED : STORED, crc, packed, unpacked, offset }
    yield localHeader(entry)
    let length = 0
    for await (const chunk of ready.open()) {
      length += chunk.length
      yield chunk
    }
    if (length !== packed) {
      throw new ArchiveError('member-size', member.name, `${member.name} has not the packed size that was stated.`)
    }
    unpackedTotal += unpacked
    offset += LOCAL_LENGTH + name.length + packed
    written.push(entry)
  }
  let directorySize = 0
  for (const entry of written) {
    const header = directoryHeader(entry)
    directorySize += header.length
    yield header
  }
  yield endRecord(written.length, directorySize, offset)
}

interface Measured {
  crc: number
  unpacked: number
}

/** A member ready to be written: what its header must say, and its packed bytes, to be read once. */
interface Ready {
  readonly crc: number
  readonly packed: number
  readonly unpacked: number
  open(): AsyncIterable<Uint8Array>
}

function copied(member: PackedZipMember, room: number): Ready {
  if (member.unpacked > room) throw tooLarge(member.name)
  const { crc, packed, unpacked } = member
  return { crc, packed, unpacked, open: () => member.openPacked() }
}

async function pack(member: ZipMember, room: number, options: ZipWriterOptions): Promise<Ready> {
  const measured: Measured = { crc: 0, unpacked: 0 }
  const source = measure(member, measured, room)
  if (member.method === 'stored') {
    for await (const _chunk of source);
    return { ...measured, packed: measured.unpacked, open: () => sameBytesAgain(member, measured) }
  }
  const chunks: Uint8Array[] = []
  let packed = 0
  for await (const chunk of (options.deflate ?? deflateInJavaScript)(source)) {
    packed += chunk.length
    chunks.push(chunk)
  }
  return { ...measured, packed, open: () => letGo(chunks) }
}

/** Lets go of each chunk as it is taken: the archive of a large draw is not held twice. */
async function* letGo(chunks: Uint8Array[]): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < chunks.length; at++) {
    const chunk = chunks[at]
    chunks[at] = NOTHING
    if (chunk) yield chunk
  }
}

const NOTHING = new Uint8Array(0)

async function* oneChunk(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  if (bytes.length > 0) yield bytes
}

async function* measure(member: ZipMember, measured: Measured, room: number): AsyncGenerator<Uint8Array> {
  for await (const chunk of member.open()) {
    measured.crc = crc32(chunk, measured.crc)
    measured.unpacked += chunk.length
    if (measured.unpacked > room) throw tooLarge(member.name)
    yield chunk
  }
}

async function* sameBytesAgain(member: ZipMember, first: Measured): AsyncGenerator<Uint8Array> {
  const second: Measured = { crc: 0, unpacked: 0 }
  yield* measure(member, second, first.unpacked)
  if (second.crc !== first.crc || second.unpacked !== first.unpacked) {
    throw new ArchiveError('member-crc', member.name, `${member.name} changed while it was being written.`)
  }
}

function tooLarge(name: string): ArchiveError {
  return new ArchiveError('archive-too-large', name, `With ${name}, the archive passes 1 GiB.`)
}

function localHeader(entry: WrittenMember): Uint8Array {
  const bytes = new Uint8Array(LOCAL_LENGTH + entry.name.length)
  const view = new DataView(bytes.buffer)
  view.setUint32(0, LOCAL_SIGNATURE, true)
  commonFields(view, 4, entry)
  bytes.set(entry.name, LOCAL_LENGTH)
  return bytes
}

function directoryHeader(entry: WrittenMember): Uint8Array {
  const bytes = new Uint8Array(DIRECTORY_LENGTH + entry.name.length)
  const view = new DataView(bytes.buffer)
  view.setUint32(0, DIRECTORY_SIGNATURE, true)
  // Made by: version 2.0 on Unix, so that unpacked files get ordinary rights (0644).
  view.setUint16(4, (3 << 8) | VERSION_NEEDED, true)
  commonFields(view, 6, entry)
  view.setUint32(38, 0o100644 << 16, true)
  view.setUint32(42, entry.offset, true)
  bytes.set(entry.name, DIRECTORY_LENGTH)
  return bytes
}

/** The fields that a local header and the directory share, version to extra length, from `at`. */
function commonFields(view: DataView, at: number, entry: WrittenMember): void {
  view.setUint16(at, VERSION_NEEDED, true)
  view.setUint16(at + 2, 0, true)
  view.setUint16(at + 4, entry.method, true)
  view.setUint16(at + 6, FIXED_TIME, true)
  view.setUint16(at + 8, FIXED_DATE, true)
  view.setUint32(at + 10, entry.crc, true)
  view.setUint32(at + 14, entry.packed, true)
  view.setUint32(at + 18, entry.unpacked, true)
  view.setUint16(at + 22, entry.name.length, true)
}

function endRecord(count: number, directorySize: number, directoryOffset: number): Uint8Array {
  const bytes = new Uint8Array(END_LENGTH)
  const view = new DataView(bytes.buffer)
  view.setUint32(0, END_SIGNATURE, true)
  view.setUint16(8, count, true)
  view.setUint16(10, count, true)
  view.setUint32(12, directorySize, true)
  view.setUint32(16, directoryOffset, true)
  return bytes
}
