import { crc32, deflateRawSync } from 'node:zlib'

/** A member of a zip that is written by hand, with whatever lies a test wants told about it. */
export interface RawMember {
  readonly name: string
  readonly bytes: Uint8Array
  /** Size that the headers state in place of the true one. */
  readonly statedSize?: number
  /** Bytes behind the end of the deflated data, counted as part of it. */
  readonly behind?: Uint8Array
}

/** Writes a zip (PKWARE APPNOTE 6.3), every member deflated. Nothing is checked: tests want bad ones too. */
export function rawZip(members: readonly RawMember[]): Buffer {
  const parts: Buffer[] = []
  const directory: Buffer[] = []
  let offset = 0
  for (const { name, bytes, statedSize = bytes.length, behind = new Uint8Array() } of members) {
    const packed = Buffer.concat([deflateRawSync(bytes), behind])
    const common = Buffer.alloc(26)
    common.writeUInt16LE(20, 0)
    common.writeUInt16LE(8, 4)
    common.writeUInt16LE(0x21, 8)
    common.writeUInt32LE(crc32(bytes), 10)
    common.writeUInt32LE(packed.length, 14)
    common.writeUInt32LE(statedSize, 18)
    common.writeUInt16LE(name.length, 22)
    const local = Buffer.concat([Buffer.from('PK\x03\x04'), common, Buffer.from(name), packed])
    const entry = Buffer.alloc(46)
    entry.write('PK\x01\x02')
    entry.writeUInt16LE(20, 4)
    common.copy(entry, 6)
    entry.writeUInt32LE(offset, 42)
    directory.push(Buffer.concat([entry, Buffer.from(name)]))
    parts.push(local)
    offset += local.length
  }
  const index = Buffer.concat(directory)
  const end = Buffer.alloc(22)
  end.write('PK\x05\x06')
  end.writeUInt16LE(members.length, 8)
  end.writeUInt16LE(members.length, 10)
  end.writeUInt32LE(index.length, 12)
  end.writeUInt32LE(offset, 16)
  return Buffer.concat([...parts, index, end])
}
