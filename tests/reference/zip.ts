// Writes a zip in the strict form of the format's section 9, from PKWARE's description (APPNOTE.TXT): no extra fields, no comment,
// no data descriptors, nothing between the members.
import { deflateRawSync } from 'node:zlib'

function crc32(bytes: Uint8Array): number {
  let crc = 0xffffffff
  for (const byte of bytes) {
    crc ^= byte
    for (let bit = 0; bit < 8; bit++) crc = crc & 1 ? (crc >>> 1) ^ 0xedb88320 : crc >>> 1
  }
  return (crc ^ 0xffffffff) >>> 0
}

const le = (value: number, bytes: number): Buffer => {
  const out = Buffer.alloc(bytes)
  out.writeUIntLE(value, 0, bytes)
  return out
}

/** Members are stored and deflated by turns, so that both ways of reading are used. `extra` goes into every header. */
export function writeZip(files: ReadonlyMap<string, Uint8Array>, extra: Uint8Array = new Uint8Array()): Buffer {
  const locals: Buffer[] = []
  const lines: Buffer[] = []
  let offset = 0
  let deflated = false
  for (const [name, bytes] of files) {
    const data = deflated ? deflateRawSync(bytes) : Buffer.from(bytes)
    const common = Buffer.concat([
      ...[20, 0, deflated ? 8 : 0, 0, 0x5c21].map((value) => le(value, 2)),
      ...[crc32(bytes), data.length, bytes.length].map((value) => le(value, 4)),
      ...[name.length, extra.length].map((value) => le(value, 2)),
    ])
    const local = Buffer.concat([le(0x04034b50, 4), common, Buffer.from(name), extra, data])
    const rest = Buffer.concat([le(0, 2), le(0, 2), le(0, 2), le(0, 4), le(offset, 4)])
    lines.push(Buffer.concat([le(0x02014b50, 4), le(20, 2), common, rest, Buffer.from(name), extra]))
    locals.push(local)
    offset += local.length
    deflated = !deflated
  }
  const directory = Buffer.concat(lines)
  const end = [le(0x06054b50, 4), le(0, 2), le(0, 2), le(files.size, 2), le(files.size, 2)]
  return Buffer.concat([...locals, directory, ...end, le(directory.length, 4), le(offset, 4), le(0, 2)])
}
