// Builds small zips whose headers can be bent at will: what a hostile archive looks like, byte by byte.
import { deflateRawSync } from 'node:zlib'
import { crc32 } from '#shared/archive/crc32.ts'

/** One entry of a hand-made zip; every field can differ between the local header and the directory. */
export interface RawZipEntry {
  name: string
  bytes: Uint8Array
  method?: number
  /** The bytes that lie in the zip, where they are not `bytes` stored or deflated. */
  packed?: Uint8Array
  local?: Partial<RawHeader>
  directory?: Partial<RawHeader>
  comment?: string
  attributes?: number
  disk?: number
  /** Bytes put before the local header that belong to nobody. */
  before?: Uint8Array
  /** Lie about where the local header is. */
  offset?: number
}

export interface RawHeader {
  version: number
  flags: number
  method: number
  time: number
  date: number
  crc: number
  packed: number
  unpacked: number
  name: string
  extra: Uint8Array
}

export interface RawZipEnd {
  comment?: string
  trailing?: Uint8Array
  leading?: Uint8Array
  beforeDirectory?: Uint8Array
  beforeEnd?: Uint8Array
  count?: number
  directorySize?: number
  directoryOffset?: number
  thisDisk?: number
  commentLength?: number
}

export function rawZip(entries: readonly RawZipEntry[], end: RawZipEnd = {}): Uint8Array {
  const parts: Uint8Array[] = []
  const directory: Uint8Array[] = []
  let at = 0
  const put = (bytes: Uint8Array) => {
    parts.push(bytes)
    at += bytes.length
  }
  put(end.leading ?? new Uint8Array(0))
  for (const entry of entries) {
    put(entry.before ?? new Uint8Array(0))
    const method = entry.method ?? 8
    const packed = entry.packed ?? (method === 8 ? new Uint8Array(deflateRawSync(entry.bytes)) : entry.bytes)
    const header: RawHeader = {
      version: 20,
      flags: 0,
      method,
      time: 0,
      date: 0x21,
      crc: crc32(entry.bytes),
      packed: packed.length,
      unpacked: entry.bytes.length,
      name: entry.name,
      extra: new Uint8Array(0),
    }
    const offset = entry.offset ?? at
    put(local({ ...header, ...entry.local }))
    put(packed)
    directory.push(central({ ...header, ...entry.directory }, entry, offset))
  }
  put(end.beforeDirectory ?? new Uint8Array(0))
  const directoryOffset = end.directoryOffset ?? at
  for (const record of directory) put(record)
  const directorySize = end.directorySize ?? directory.reduce((sum, record) => sum + record.length, 0)
  put(end.beforeEnd ?? new Uint8Array(0))
  const comment = Buffer.from(end.comment ?? '', 'latin1')
  const record = Buffer.alloc(22)
  record.writeUInt32LE(0x06054b50, 0)
  record.writeUInt16LE(end.thisDisk ?? 0, 4)
  record.writeUInt16LE(end.count ?? entries.length, 8)
  record.writeUInt16LE(end.count ?? entries.length, 10)
  record.writeUInt32LE(directorySize, 12)
  record.writeUInt32LE(directoryOffset, 16)
  record.writeUInt16LE(end.commentLength ?? comment.length, 20)
  put(record)
  put(comment)
  put(end.trailing ?? new Uint8Array(0))
  return new Uint8Array(Buffer.concat(parts))
}

function common(header: RawHeader): Buffer {
  const bytes = Buffer.alloc(24)
  bytes.writeUInt16LE(header.version, 0)
  bytes.writeUInt16LE(header.flags, 2)
  bytes.writeUInt16LE(header.method, 4)
  bytes.writeUInt16LE(header.time, 6)
  bytes.writeUInt16LE(header.date, 8)
  bytes.writeUInt32LE(header.crc, 10)
  bytes.writeUInt32LE(header.packed, 14)
  bytes.writeUInt32LE(header.unpacked, 18)
  bytes.writeUInt16LE(header.name.length, 22)
  return bytes
}

function local(header: RawHeader): Uint8Array {
  const extraLength = Buffer.alloc(2)
  extraLength.writeUInt16LE(header.extra.length)
  return Buffer.concat([
    Buffer.from([0x50, 0x4b, 3, 4]),
    common(header),
    extraLength,
    Buffer.from(header.name, 'latin1'),
    header.extra,
  ])
}

function central(header: RawHeader, entry: RawZipEntry, offset: number): Uint8Array {
  const comment = Buffer.from(entry.comment ?? '', 'latin1')
  const tail = Buffer.alloc(16)
  tail.writeUInt16LE(header.extra.length, 0)
  tail.writeUInt16LE(comment.length, 2)
  tail.writeUInt16LE(entry.disk ?? 0, 4)
  tail.writeUInt32LE(entry.attributes ?? 0, 8)
  tail.writeUInt32LE(offset, 12)
  return Buffer.concat([
    Buffer.from([0x50, 0x4b, 1, 2, 20, 3]),
    common(header),
    tail,
    Buffer.from(header.name, 'latin1'),
    header.extra,
    comment,
  ])
}
