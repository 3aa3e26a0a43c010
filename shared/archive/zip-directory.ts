import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { ByteSource } from '#shared/archive/byte-source.ts'
import {
  checkMemberName,
  checkNameIsNew,
  DEFLATED,
  DIRECTORY_LENGTH,
  DIRECTORY_SIGNATURE,
  END_LENGTH,
  END_SIGNATURE,
  LOCAL_LENGTH,
  LOCAL_SIGNATURE,
  MAX_MEMBERS,
  MAX_UNPACKED,
  STORED,
} from '#shared/archive/zip-format.ts'

/** One member as the directory and its local header, agreeing, describe it. Sizes and offsets in bytes. */
export interface DirectoryEntry {
  readonly name: string
  readonly method: typeof STORED | typeof DEFLATED
  readonly crc: number
  readonly packed: number
  readonly unpacked: number
  /** Where its bytes begin. */
  readonly dataOffset: number
}

const UTF8_NAMES = 1 << 11
const DEFLATE_SPEED = 0b110
const UNIX_TIME = 0x5455
const MAX_DIRECTORY = 2 ** 20

/**
 * Reads and checks a zip's directory against PROTOCOL section 9: every byte of the archive belongs to a member, to its
 * header or to the directory, and every local header says what the directory says. Input is hostile; each refusal is an
 * ArchiveError that names the member. Members come in the order in which they lie.
 */
export async function readDirectory(source: ByteSource): Promise<DirectoryEntry[]> {
  const end = await readEndRecord(source)
  const directory = await source.read(end.directoryOffset, end.directorySize)
  const raw = parseDirectory(directory, end.count)
  const seen = new Set<string>()
  let unpackedTotal = 0
  for (const entry of raw) {
    checkMemberName(entry.name)
    checkNameIsNew(entry.name, seen)
    checkEntry(entry)
    unpackedTotal += entry.unpacked
    if (unpackedTotal > MAX_UNPACKED) {
      throw new ArchiveError('archive-too-large', entry.name, `With ${entry.name}, the archive unpacks to over 1 GiB.`)
    }
  }
  raw.sort((a, b) => a.offset - b.offset)
  const entries: DirectoryEntry[] = []
  let at = 0
  for (const entry of raw) {
    refuseGap(entry.offset, at, entry.name)
    const dataOffset = await checkLocalHeader(source, entry, end.directoryOffset)
    at = dataOffset + entry.packed
    entries.push({
      name: entry.name,
      method: entry.method === STORED ? STORED : DEFLATED,
      crc: entry.crc,
      packed: entry.packed,
      unpacked: entry.unpacked,
      dataOffset,
    })
  }
  refuseGap(end.directoryOffset, at, null)
  return entries
}

interface RawEntry {
  readonly name: string
  readonly flags: number
  readonly method: number
  readonly crc: number
  readonly packed: number
  readonly unpacked: number
  readonly disk: number
  readonly attributes: number
  readonly offset: number
  readonly commentLength: number
  /** Version needed to name length, as they stand: 22 bytes that the local header must repeat. */
  readonly common: Uint8Array
  readonly extra: Uint8Array
}

async function readEndRecord(source: ByteSource) {
  if (source.size < END_LENGTH) throw new ArchiveError('not-a-zip', null, 'This file is too short to be a zip.')
  const tailLength = Math.min(source.size, END_LENGTH + 0xffff)
  const tail = await source.read(source.size - tailLength, tailLength)
  const tailView = viewOf(tail)
  const at = tailLength - END_LENGTH
  if (tailView.getUint32(at, true) !== END_SIGNATURE) {
    for (let earlier = at - 1; earlier >= 0; earlier--) {
      if (tailView.getUint32(earlier, true) !== END_SIGNATURE) continue
      const comment = tailView.getUint16(earlier + 20, true)
      if (earlier + END_LENGTH + comment === tailLength) {
        throw new ArchiveError('zip-comment', null, 'The zip carries a comment behind its directory.')
      }
      throw new ArchiveError('zip-trailing-bytes', null, 'There are bytes behind the end of the zip.')
    }
    throw new ArchiveError('not-a-zip', null, 'This file is not a zip, or its end is cut off.')
  }
  const view = new DataView(tail.buffer, tail.byteOffset + at, END_LENGTH)
  const count = view.getUint16(10, true)
  const directorySize = view.getUint32(12, true)
  const directoryOffset = view.getUint32(16, true)
  if (count === 0xffff || directorySize === 0xffffffff || directoryOffset === 0xffffffff) {
    throw new ArchiveError('zip64', null, 'The zip uses the zip64 extension, which a proof archive never needs.')
  }
  if (view.getUint16(4, true) !== 0 || view.getUint16(6, true) !== 0 || view.getUint16(8, true) !== count) {
    throw new ArchiveError('zip-split', null, 'The zip says that it is one part of several.')
  }
  if (view.getUint16(20, true) !== 0) {
    throw new ArchiveError('zip-directory', null, 'The zip announces a comment that is not there.')
  }
  if (count > MAX_MEMBERS || directorySize > MAX_DIRECTORY) {
    throw new ArchiveError('zip-too-many-members', null, `The zip has more than ${MAX_MEMBERS} members.`)
  }
  const expectedOffset = source.size - END_LENGTH - directorySize
  if (directoryOffset < expectedOffset) {
    throw new ArchiveError('zip-gap', null, 'There are bytes before the zip or between its directory and its end.')
  }
  if (directoryOffset > expectedOffset) {
    throw new ArchiveError('zip-directory', null, 'The directory of the zip does not lie where its end says.')
  }
  return { count, directorySize, directoryOffset }
}

function parseDirectory(directory: Uint8Array, count: number): RawEntry[] {
  const broken = (why: string) => new ArchiveError('zip-directory', null, `The directory of the zip is broken: ${why}.`)
  const view = viewOf(directory)
  const entries: RawEntry[] = []
  let at = 0
  for (let index = 0; index < count; index++) {
    if (at + DIRECTORY_LENGTH > directory.length) throw broken('it is too short')
    if (view.getUint32(at, true) !== DIRECTORY_SIGNATURE) throw broken(`its record ${index + 1} has no signature`)
    const nameLength = view.getUint16(at + 28, true)
    const extraLength = view.getUint16(at + 30, true)
    const commentLength = view.getUint16(at + 32, true)
    const nameEnd = at + DIRECTORY_LENGTH + nameLength
    const next = nameEnd + extraLength + commentLength
    if (next > directory.length) throw broken('it is too short')
    entries.push({
      // One character a byte: a name that is not plain ASCII is refused by its characters.
      name: String.fromCharCode(...directory.subarray(at + DIRECTORY_LENGTH, nameEnd).subarray(0, 1000)),
      flags: view.getUint16(at + 8, true),
      method: view.getUint16(at + 10, true),
      crc: view.getUint32(at + 16, true),
      packed: view.getUint32(at + 20, true),
      unpacked: view.getUint32(at + 24, true),
      disk: view.getUint16(at + 34, true),
      attributes: view.getUint32(at + 38, true),
      offset: view.getUint32(at + 42, true),
      commentLength,
      common: directory.subarray(at + 6, at + 30),
      extra: directory.subarray(nameEnd, nameEnd + extraLength),
    })
    at = next
  }
  if (at !== directory.length) throw broken('there are bytes behind its last record')
  return entries
}

function checkEntry(entry: RawEntry): void {
  const { name } = entry
  if (entry.packed === 0xffffffff || entry.unpacked === 0xffffffff || entry.offset === 0xffffffff) {
    throw new ArchiveError('zip64', name, `${name} uses the zip64 extension, which a proof archive never needs.`)
  }
  if (entry.flags & 0x2041) throw new ArchiveError('zip-encrypted', name, `${name} is encrypted.`)
  if (entry.flags & 8) {
    throw new ArchiveError('zip-data-descriptor', name, `${name} keeps its sizes behind its bytes, not in its header.`)
  }
  if (entry.flags & ~(UTF8_NAMES | DEFLATE_SPEED)) {
    throw new ArchiveError('zip-flags', name, `${name} has flags that a proof archive never uses.`)
  }
  if (entry.method !== STORED && entry.method !== DEFLATED) {
    throw new ArchiveError('zip-method', name, `${name} is packed by method ${entry.method}; stored and deflated pass.`)
  }
  if (entry.method === STORED && entry.packed !== entry.unpacked) {
    throw new ArchiveError('member-size', name, `${name} is stored, but its two sizes differ.`)
  }
  if (entry.disk !== 0) throw new ArchiveError('zip-split', name, `${name} lies in another part of a split zip.`)
  if (entry.commentLength > 0) throw new ArchiveError('zip-comment', name, `${name} carries a comment.`)
  checkExtra(entry)
  const fileType = (entry.attributes >>> 28) & 0xf
  if ((fileType !== 0 && fileType !== 8) || entry.attributes & 0x10) {
    throw new ArchiveError('zip-not-a-file', name, `${name} is not an ordinary file.`)
  }
}

/** The only extra field that passes tells a time ("UT"): others can give a member a second name or size, or hide data. */
function checkExtra({ name, extra }: RawEntry): void {
  const view = viewOf(extra)
  let at = 0
  while (at + 4 <= extra.length) {
    const id = view.getUint16(at, true)
    if (id === 1) throw new ArchiveError('zip64', name, `${name} uses the zip64 extension.`)
    if (id !== UNIX_TIME) break
    at += 4 + view.getUint16(at + 2, true)
  }
  if (at !== extra.length) {
    throw new ArchiveError('zip-extra-field', name, `${name} has an extra field that a proof archive never uses.`)
  }
}

async function checkLocalHeader(source: ByteSource, entry: RawEntry, limit: number): Promise<number> {
  const { name } = entry
  const differs = () =>
    new ArchiveError('zip-local-header', name, `The header before ${name} does not say what the directory says.`)
  const length = LOCAL_LENGTH + entry.name.length + entry.extra.length
  if (entry.offset + length > limit) throw differs()
  const header = await source.read(entry.offset, length)
  const view = viewOf(header)
  if (view.getUint32(0, true) !== LOCAL_SIGNATURE) throw differs()
  // Version, flags, method, time, date, CRC, sizes, name and extra length stand in the same order in both.
  if (!sameBytes(header.subarray(4, 28), entry.common)) throw differs()
  if (view.getUint16(28, true) !== entry.extra.length) throw differs()
  for (let index = 0; index < name.length; index++) {
    if (header[LOCAL_LENGTH + index] !== name.charCodeAt(index)) throw differs()
  }
  if (!sameBytes(header.subarray(LOCAL_LENGTH + name.length), entry.extra)) throw differs()
  if (entry.offset + length + entry.packed > limit) {
    throw new ArchiveError('zip-overlap', name, `${name} reaches into the directory of the zip.`)
  }
  return entry.offset + length
}

function refuseGap(start: number, expected: number, member: string | null): void {
  const what = member ?? 'the directory'
  if (start > expected) throw new ArchiveError('zip-gap', member, `There are bytes of no member before ${what}.`)
  if (start < expected) throw new ArchiveError('zip-overlap', member, `Two members overlap before ${what}.`)
}

function sameBytes(a: Uint8Array, b: Uint8Array): boolean {
  return a.length === b.length && a.every((byte, index) => byte === b[index])
}

function viewOf(bytes: Uint8Array): DataView {
  return new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength)
}
