// Steps 1 and 2 of the check: zips that two programs could read differently, and keys that prove nothing.
import { deflateRawSync } from 'node:zlib'
import { ed25519 } from '@noble/curves/ed25519.js'
import { describe, expect, it } from 'vitest'
import { makeArchive, sums } from './archives.ts'
import { hex, unhex, utf8 } from './record.ts'
import { base, pem, refusals } from './refusals.ts'
import { writeZip } from './zip.ts'

const { outcomeOf, step } = refusals()

describe('a bad Ed25519 key', () => {
  const message = async (key: Uint8Array): Promise<string> => {
    const { zip } = makeArchive({ ...base, change: { files: (files) => files.set('site-key.pem', pem(key)) } })
    const outcome = await outcomeOf(zip)
    return `${outcome.step}: ${outcome.message}`
  }

  it('of small order is refused: all eight points, as @noble/curves finds them', async () => {
    const points = new Set<string>()
    // Multiplying any point by the group's odd order leaves a point of order 1, 2, 4 or 8.
    for (let y = 2n; points.size < 8; y++) {
      const bytes = unhex(y.toString(16).padStart(64, '0')).reverse()
      try {
        const point = ed25519.Point.fromBytes(bytes, true)
        points.add(
          hex(
            point
              .multiplyUnsafe(ed25519.Point.Fn.ORDER - 1n)
              .add(point)
              .toBytes(),
          ),
        )
      } catch {
        // Not every y has a point.
      }
    }
    for (const point of points) expect(await message(unhex(point))).toBe('2: the key is a point of small order.')
  })

  it('in another form than the canonical one is refused', async () => {
    // y = p + 1, which reads as 1, and y = 2^255 − 1.
    for (const key of [`ee${'ff'.repeat(30)}7f`, `ff${'ff'.repeat(30)}7f`]) {
      expect(await message(unhex(key))).toBe('2: the key is not in canonical form.')
    }
  })
})

describe('a zip that two programs could read differently is refused:', () => {
  const made = makeArchive(base)
  const end = made.zip.length - 22
  const directory = made.zip.readUInt32LE(end + 16)
  const edit = (change: (zip: Buffer) => void): Buffer => {
    const zip = Buffer.from(made.zip)
    change(zip)
    return zip
  }
  /** A byte put in at a place, with every offset behind it put right. */
  const inserted = (place: number): Buffer => {
    const zip = Buffer.concat([made.zip.subarray(0, place), utf8('x'), made.zip.subarray(place)])
    for (let line = directory + 1; zip.readUInt32LE(line) === 0x02014b50; line += 46 + zip.readUInt16LE(line + 28)) {
      const offset = zip.readUInt32LE(line + 42)
      if (offset >= place) zip.writeUInt32LE(offset + 1, line + 42)
    }
    zip.writeUInt32LE(directory + 1, zip.length - 6)
    return zip
  }
  const rows: [string, () => Buffer, string][] = [
    ['bytes before it', () => Buffer.concat([utf8('#!'), made.zip]), '1 the zip file'],
    ['bytes behind it', () => Buffer.concat([made.zip, utf8('x')]), '1 the zip file'],
    ['bytes before the first member', () => inserted(0), '1 the member seal.json'],
    ['bytes between two members', () => inserted(made.zip.indexOf('seal.sig') - 30), '1 the member seal.sig'],
    ['bytes before the directory', () => inserted(directory), '1 the zip file'],
    ['a comment', () => edit((zip) => zip.writeUInt16LE(1, end + 20)), '1 the zip file'],
    ['a member count too low', () => edit((zip) => zip.writeUInt16LE(12, end + 8)), '1 the zip file'],
    ['another name in the local header', () => edit((zip) => zip.write('SEAL.json', 30)), '1 the member seal.json'],
    ['another size in the local header', () => edit((zip) => zip.writeUInt32LE(1, 22)), '1 the member seal.json'],
    [
      'another checksum',
      () =>
        edit((zip) => {
          zip.writeUInt32LE(1, 14)
          zip.writeUInt32LE(1, directory + 16)
        }),
      '1 the member seal.json',
    ],
    [
      'an encrypted member',
      () =>
        edit((zip) => {
          zip.writeUInt16LE(1, 6)
          zip.writeUInt16LE(1, directory + 8)
        }),
      '1 the member seal.json',
    ],
    [
      'sizes behind the member',
      () =>
        edit((zip) => {
          zip.writeUInt16LE(8, 6)
          zip.writeUInt16LE(8, directory + 8)
        }),
      '1 the member seal.json',
    ],
    [
      'a link',
      () =>
        edit((zip) => {
          zip[directory + 5] = 3
          zip.writeUInt32LE(0xa1ff0000, directory + 38)
        }),
      '1 the member seal.json',
    ],
    [
      'a size above the limit',
      () => edit((zip) => zip.writeUInt32LE(2 ** 30 + 1, directory + 24)),
      '1 the member seal.json',
    ],
    ['a name in two letter cases', () => renamed('x.txt', 'Seal.JSON'), '1 the member Seal.JSON'],
    ['a member in a folder', () => renamed('x.txt', 'a/x.txt'), '1 the member "a/x.txt"'],
    ['a member without a digest', () => writeZip(new Map([...made.files, ['extra.txt', utf8('x')]])), '1 SHA256SUMS'],
    [
      'a digest without a member',
      () =>
        writeZip(
          new Map([
            ...made.files,
            ['SHA256SUMS', Buffer.concat([sums(made.files), utf8(`${'0'.repeat(64)}  extra.txt\n`)])],
          ]),
        ),
      '1 SHA256SUMS',
    ],
    [
      'a damaged member',
      () => writeZip(new Map([...made.files, ['terms.txt', utf8('x\n')]])),
      '1 the member terms.txt',
    ],
  ]
  const renamed = (_: string, name: string): Buffer => {
    const files = new Map<string, Buffer>([...made.files, [name, utf8('x')]])
    return writeZip(files.set('SHA256SUMS', sums(files)))
  }
  it.each(rows)('%s', async (_, zip, where) => {
    expect(await step(zip())).toBe(where)
  })

  it('bytes behind the compressed data', async () => {
    // seal.sig is the second member, and so deflated: one byte more inside its data, and both headers say so.
    const packed = deflateRawSync(made.files.get('seal.sig') ?? Buffer.alloc(0)).length
    const name = made.zip.indexOf('seal.sig')
    const zip = inserted(name + 8 + packed)
    zip.writeUInt32LE(packed + 1, name - 30 + 18)
    const firstLine = 46 + 'seal.json'.length
    zip.writeUInt32LE(packed + 1, directory + 1 + firstLine + 20)
    expect(await step(zip)).toBe('1 the member seal.sig')
  })

  it('an extra field, unless it is a time', async () => {
    const field = (id: string): Buffer => unhex(`${id}0500010000cc65`)
    expect(await step(writeZip(made.files, field('5554')))).toBe('holds')
    expect(await step(writeZip(made.files, field('7570')))).toBe('1 the member seal.json')
    expect(await step(writeZip(made.files, field('5554').subarray(0, 7)))).toBe('1 the member seal.json')
  })
})
