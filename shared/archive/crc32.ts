// CRC-32 as zip uses it (ISO 3309, reflected polynomial 0xEDB88320), four bytes at a step ("slicing by four").
const TABLES = makeTables()

function makeTables(): readonly [Uint32Array, Uint32Array, Uint32Array, Uint32Array] {
  const first = new Uint32Array(256)
  for (let index = 0; index < 256; index++) {
    let value = index
    for (let bit = 0; bit < 8; bit++) value = value & 1 ? (value >>> 1) ^ 0xedb88320 : value >>> 1
    first[index] = value
  }
  const next = (table: Uint32Array) => table.map((value) => (value >>> 8) ^ (first[value & 0xff] ?? 0))
  const second = next(first)
  const third = next(second)
  return [first, second, third, next(third)]
}

/**
 * The CRC-32 of `bytes`, or of everything before it and `bytes` where `previous` is the CRC so far.
 * Returns a whole number from 0 to 2^32 - 1.
 */
export function crc32(bytes: Uint8Array, previous = 0): number {
  const [t0, t1, t2, t3] = TABLES
  let crc = ~previous
  let at = 0
  const whole = bytes.length - (bytes.length % 4)
  // Every index below is masked to 0..255 or bounded by the loop.
  while (at < whole) {
    crc ^= bytes[at]! | (bytes[at + 1]! << 8) | (bytes[at + 2]! << 16) | (bytes[at + 3]! << 24) | 0
    crc = t3[crc & 0xff]! ^ t2[(crc >>> 8) & 0xff]! ^ t1[(crc >>> 16) & 0xff]! ^ t0[crc >>> 24]!
    at += 4
  }
  while (at < bytes.length) crc = (crc >>> 8) ^ t0[(crc ^ bytes[at++]!) & 0xff]!
  return ~crc >>> 0
}
