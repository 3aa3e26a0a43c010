import { execFileSync } from 'node:child_process'
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { unzipSync, zipSync } from 'fflate'
import { crc32 as zlibCrc32, deflateRawSync } from 'node:zlib'
import { describe, expect, it } from 'vitest'
import { deflateWithZlib, inflateWithZlib } from '#server/adapters/archive/zlib-codec.ts'
import { ArchiveError, type ArchiveErrorCode } from '#shared/archive/archive-error.ts'
import { memorySource } from '#shared/archive/byte-source.ts'
import { crc32 } from '#shared/archive/crc32.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { bytesMember, writeZip, type ZipMember } from '#shared/archive/zip-writer.ts'
import { collect } from '#tests/support/archive/collect.ts'
import { rawZip, type RawZipEnd, type RawZipEntry } from '#tests/support/archive/zip-patch.ts'

const bytes = (text: string) => new Uint8Array(Buffer.from(text))
const noise = (length: number) => Uint8Array.from({ length }, (_, i) => (i * 2654435761) >>> 24)
const longText = bytes('tickets,entry_commit\n'.repeat(20_000))

async function readAll(zip: Uint8Array, inflate?: typeof inflateWithZlib): Promise<Record<string, Uint8Array>> {
  const source = await openZip(memorySource(zip), inflate ? { inflate } : {})
  const members: Record<string, Uint8Array> = {}
  for (const name of source.names) members[name] = await collect(source.open(name))
  return members
}

const members: readonly ZipMember[] = [
  bytesMember('seal.json', bytes('{"a":1}')),
  bytesMember('seal.sig', noise(64), 'stored'),
  bytesMember('entries.csv', longText),
  bytesMember('labels.jsonl', bytes('')),
  bytesMember('empty-stored', bytes(''), 'stored'),
  bytesMember('noise.bin', noise(300_000)),
]
const expected = {
  'seal.json': bytes('{"a":1}'),
  'seal.sig': noise(64),
  'entries.csv': longText,
  'labels.jsonl': bytes(''),
  'empty-stored': bytes(''),
  'noise.bin': noise(300_000),
}

describe('crc32', () => {
  it('agrees with zlib at every length and when continued', () => {
    for (const length of [0, 1, 2, 3, 4, 5, 7, 8, 63, 64, 65, 1000]) {
      const data = noise(length)
      expect(crc32(data)).toBe(zlibCrc32(data))
      expect(crc32(data.subarray(length >> 1), crc32(data.subarray(0, length >> 1)))).toBe(zlibCrc32(data))
    }
  })

  it('gives the check value 0xcbf43926 for 123456789 (the RevEng catalogue of CRCs, from memory)', () => {
    expect(crc32(bytes('123456789'))).toBe(0xcbf43926)
  })
})

describe.each([
  ['plain JavaScript', undefined, undefined],
  ['zlib', deflateWithZlib, inflateWithZlib],
])('a zip by %s', (_name, deflate, inflate) => {
  const write = () => collect(writeZip(members, deflate ? { deflate } : {}))

  it('is read back by this reader and by fflate, which is not ours', async () => {
    const zip = await write()
    expect(await readAll(zip, inflate)).toEqual(expected)
    expect(unzipSync(zip)).toEqual(expected)
  })

  it('has the same bytes every time, and compresses', async () => {
    const zip = await write()
    expect(Buffer.compare(zip, await write())).toBe(0)
    expect(zip.length).toBeLessThan(longText.length)
  })

  it('reads what fflate wrote', async () => {
    const zip = zipSync(expected, { mtime: '2026-03-01T12:00:00Z' })
    expect(await readAll(zip, inflate)).toEqual(expected)
  })

  it('refuses compressed data that is damaged, cut, or has bytes behind its last block', async () => {
    const packed = new Uint8Array(deflateRawSync(longText))
    const broken = Uint8Array.from(packed)
    broken[40] = (broken[40] ?? 0) ^ 0xff
    const cases: [Uint8Array, ArchiveErrorCode][] = [
      [packed.subarray(0, packed.length - 20), 'member-compression'],
      [new Uint8Array([...packed, 0]), 'member-compression'],
      [new Uint8Array([...packed, ...noise(70_000)]), 'member-compression'],
      [new Uint8Array(0), 'member-compression'],
    ]
    for (const [bent, code] of cases) {
      const zip = rawZip([{ name: 'entries.csv', bytes: longText, packed: bent }])
      await expect(readAll(zip, inflate)).rejects.toMatchObject({ code, member: 'entries.csv' })
    }
    await expect(
      readAll(rawZip([{ name: 'entries.csv', bytes: longText, packed: broken }]), inflate),
    ).rejects.toBeInstanceOf(ArchiveError)
  })

  it('stops a member that unpacks to more than it states, long before its end', async () => {
    const bomb = new Uint8Array(deflateRawSync(new Uint8Array(2 ** 26)))
    const sizes = { unpacked: 1000 }
    const zip = rawZip([{ name: 'a', bytes: new Uint8Array(0), packed: bomb, local: sizes, directory: sizes }])
    await expect(readAll(zip, inflate)).rejects.toMatchObject({ code: 'member-size', member: 'a' })
  })
})

it('members are copied from one zip into another as they are packed', async () => {
  const first = await openZip(memorySource(await collect(writeZip(members))))
  const copies = first.names.filter((name) => name !== 'labels.jsonl').map((name) => first.packed(name))
  const second = await collect(writeZip([...copies, bytesMember('labels.jsonl', bytes('{}'))]))
  expect(await readAll(second)).toEqual({ ...expected, 'labels.jsonl': bytes('{}') })
  const short = { ...first.packed('noise.bin'), openPacked: () => first.packed('seal.json').openPacked() }
  await expect(collect(writeZip([short]))).rejects.toMatchObject({ code: 'member-size', member: 'noise.bin' })
})

it.skipIf(!existsSync('/usr/bin/unzip'))("Debian's unzip finds nothing wrong", async () => {
  const folder = mkdtempSync(join(tmpdir(), 'evenpenny-zip-'))
  try {
    writeFileSync(join(folder, 'a.zip'), await collect(writeZip(members)))
    execFileSync('/usr/bin/unzip', ['-q', 'a.zip'], { cwd: folder })
    for (const [name, content] of Object.entries(expected)) {
      expect(Buffer.compare(readFileSync(join(folder, name)), content)).toBe(0)
    }
  } finally {
    rmSync(folder, { recursive: true })
  }
})

it('zlib and plain JavaScript read each other', async () => {
  const byZlib = await collect(writeZip(members, { deflate: deflateWithZlib }))
  const plain = await collect(writeZip(members))
  expect(await readAll(byZlib)).toEqual(expected)
  expect(await readAll(plain, inflateWithZlib)).toEqual(expected)
})

describe('writeZip', () => {
  it.each(['../seal.json', 'a/b', '', '.', '..', 'seal json', 'naïve', 'a'.repeat(121)])(
    'refuses the name %j',
    async (name) => {
      await expect(collect(writeZip([bytesMember(name, bytes('x'))]))).rejects.toMatchObject({ code: 'member-name' })
    },
  )

  it('refuses names that differ only in letter case', async () => {
    const twice = [bytesMember('Seal.json', bytes('x')), bytesMember('seal.JSON', bytes('y'))]
    await expect(collect(writeZip(twice))).rejects.toMatchObject({ code: 'member-doubled', member: 'seal.JSON' })
  })

  it('refuses more than 1 GiB, and a stored member that changes between its two readings', async () => {
    const block = new Uint8Array(2 ** 20)
    const huge: ZipMember = {
      name: 'huge',
      method: 'stored',
      async *open() {
        for (let i = 0; i < 1025; i++) yield block
      },
    }
    await expect(collect(writeZip([huge]))).rejects.toMatchObject({ code: 'archive-too-large' })
    let opened = 0
    const fickle: ZipMember = {
      name: 'fickle',
      method: 'stored',
      async *open() {
        yield Uint8Array.of(opened++)
      },
    }
    await expect(collect(writeZip([fickle]))).rejects.toMatchObject({ code: 'member-crc', member: 'fickle' })
  })
})

describe('openZip refuses', () => {
  const a: RawZipEntry = { name: 'a.txt', bytes: bytes('first member, long enough to matter') }
  const b: RawZipEntry = { name: 'b.txt', bytes: bytes('second'), method: 0 }
  const both = (change: Partial<RawZipEntry>) => rawZip([a, { ...b, ...change }])
  const end = (change: RawZipEnd) => rawZip([a, b], change)
  const inBoth = (change: RawZipEntry['local']) => both({ local: change, directory: change })
  const sound = rawZip([a, b])
  const timeField = Uint8Array.from([0x55, 0x54, 5, 0, 1, 0, 0, 0, 0])
  const localAt = (zip: Uint8Array, name: string) => Buffer.from(zip).indexOf(name) - 30

  const cases: [string, Uint8Array, ArchiveErrorCode, string | null][] = [
    ['nothing', new Uint8Array(0), 'not-a-zip', null],
    ['something else', bytes('<!doctype html>'.repeat(40)), 'not-a-zip', null],
    ['an archive cut short', sound.subarray(0, sound.length - 5), 'not-a-zip', null],
    ['bytes behind it', end({ trailing: bytes('x') }), 'zip-trailing-bytes', null],
    ['a comment', end({ comment: 'hello' }), 'zip-comment', null],
    ['a comment that is announced only', end({ commentLength: 4 }), 'zip-directory', null],
    ['bytes before it', end({ leading: bytes('MZ') }), 'zip-gap', 'a.txt'],
    ['bytes before it, offsets shifted', end({ leading: bytes('MZ'), directoryOffset: 0 }), 'zip-gap', null],
    ['bytes between two members', both({ before: bytes('hidden') }), 'zip-gap', 'b.txt'],
    ['bytes before the directory', end({ beforeDirectory: bytes('hidden') }), 'zip-gap', null],
    ['bytes behind the directory', end({ beforeEnd: bytes('hidden') }), 'zip-gap', null],
    ['a directory elsewhere', end({ directoryOffset: 0xfffff }), 'zip-directory', null],
    ['a member twice in the directory at one place', rawZip([a, { ...b, offset: 0 }]), 'zip-overlap', 'b.txt'],
    ['a doubled name', rawZip([a, { ...b, name: 'A.TXT' }]), 'member-doubled', 'A.TXT'],
    ['a path', both({ name: '../b.txt' }), 'member-name', '../b.txt'],
    ['a backslash', both({ name: 'c\\b' }), 'member-name', 'c\\b'],
    ['a folder', both({ name: 'folder/', bytes: new Uint8Array(0) }), 'member-name', 'folder/'],
    ['a name of dots', both({ name: '..' }), 'member-name', '..'],
    ['zip64 by its end', end({ count: 0xffff }), 'zip64', null],
    ['zip64 by a size', inBoth({ unpacked: 0xffffffff }), 'zip64', 'b.txt'],
    ['zip64 by a field', inBoth({ extra: Uint8Array.from([1, 0, 0, 0]) }), 'zip64', 'b.txt'],
    ['another name in a field', inBoth({ extra: Uint8Array.from([0x75, 0x70, 0, 0]) }), 'zip-extra-field', 'b.txt'],
    ['a field that is cut', inBoth({ extra: Uint8Array.from([0x55]) }), 'zip-extra-field', 'b.txt'],
    ['a time in the directory only', both({ directory: { extra: timeField } }), 'zip-local-header', 'b.txt'],
    ['encryption', inBoth({ flags: 1 }), 'zip-encrypted', 'b.txt'],
    ['sizes behind the bytes', inBoth({ flags: 8 }), 'zip-data-descriptor', 'b.txt'],
    ['patch data', inBoth({ flags: 32 }), 'zip-flags', 'b.txt'],
    ['an unknown method', inBoth({ method: 12 }), 'zip-method', 'b.txt'],
    ['a stored member of two sizes', inBoth({ unpacked: 7 }), 'member-size', 'b.txt'],
    ['a link', both({ attributes: (0o120777 << 16) >>> 0 }), 'zip-not-a-file', 'b.txt'],
    ['a split zip', both({ disk: 1 }), 'zip-split', 'b.txt'],
    ['a split zip by its end', end({ thisDisk: 1 }), 'zip-split', null],
    ["a member's comment", both({ comment: 'x' }), 'zip-comment', 'b.txt'],
    ['another name in the local header', both({ local: { name: 'c.txt' } }), 'zip-local-header', 'b.txt'],
    ['another size in the local header', both({ local: { unpacked: 5 } }), 'zip-local-header', 'b.txt'],
    ['another CRC in the local header', both({ local: { crc: 5 } }), 'zip-local-header', 'b.txt'],
    ['another time in the local header', both({ local: { time: 5 } }), 'zip-local-header', 'b.txt'],
    ['a wrong CRC', inBoth({ crc: 5 }), 'member-crc', 'b.txt'],
    ['a count that is too small', end({ count: 1 }), 'zip-directory', null],
    ['a count that is too large', end({ count: 3 }), 'zip-directory', null],
    ['over 1 GiB', inBoth({ method: 8, packed: 6, unpacked: 2 ** 30 }), 'archive-too-large', 'b.txt'],
  ]
  it.each(cases)('%s', async (_what, zip, code, member) => {
    await expect(readAll(zip)).rejects.toMatchObject({ code, member })
  })

  it('a member that reaches into the next one', async () => {
    const zip = Uint8Array.from(rawZip([{ ...a, method: 0 }, b]))
    const longer = a.bytes.length + 3
    const patch = (at: number) => {
      zip[at] = longer
      zip[at + 4] = longer
    }
    patch(localAt(zip, 'a.txt') + 18)
    patch(Buffer.from(zip).lastIndexOf('a.txt') - 46 + 20)
    await expect(readAll(zip)).rejects.toMatchObject({ code: 'zip-overlap', member: 'b.txt' })
  })

  it('nothing in an archive whose fields only tell times', async () => {
    expect(Object.keys(await readAll(inBoth({ extra: timeField })))).toEqual(['a.txt', 'b.txt'])
  })

  it('one flipped bit anywhere in a small archive', async () => {
    // Stored, because the last byte of deflated data may have bits that nothing reads.
    const sound = rawZip([{ ...a, method: 0 }, b])
    const names: string[] = []
    for (let at = 0; at < sound.length; at++) {
      for (let bit = 0; bit < 8; bit++) {
        const bent = Uint8Array.from(sound)
        bent[at] = (bent[at] ?? 0) ^ (1 << bit)
        const read = await readAll(bent).catch((error: unknown) => {
          expect(error).toBeInstanceOf(ArchiveError)
          return null
        })
        if (read) names.push(`${at}:${bit}`)
      }
    }
    // What passes changes no member and no name: version made by, internal attributes, and rights.
    const made = directoryFields(sound)
    for (const place of names) expect(made).toContain(Number(place.split(':')[0]))
  })
})

/** Offsets of the directory bytes that say nothing about a member's content. */
function directoryFields(zip: Uint8Array): number[] {
  const found: number[] = []
  for (
    let at = Buffer.from(zip).indexOf('PK\x01\x02');
    at !== -1;
    at = Buffer.from(zip).indexOf('PK\x01\x02', at + 1)
  ) {
    found.push(at + 4, at + 5, at + 36, at + 37, at + 38, at + 39, at + 40, at + 41)
  }
  return found
}
