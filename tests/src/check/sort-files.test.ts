import { describe, expect, it } from 'vitest'
import { sortFiles } from '#src/features/check/sort-files.ts'

const file = (name: string, ...content: BlobPart[]) => new File(content, name)
/** A file that says it is so long, without the bytes. */
function long(name: string, start: string, size: number): File {
  const real = file(name, start)
  return Object.defineProperty(real, 'size', { value: size })
}

describe('files dropped on the check', () => {
  it('tells archives from receipts by how they begin, not by their names', async () => {
    const zip = file('saved-without-ending', 'PK\u0003\u0004rest')
    const receipt = file('receipt', '{"kind":"receipt"}')
    const sorted = await sortFiles([receipt, zip])
    expect(sorted).toEqual({ archive: zip, receipts: [receipt], certificates: [], refused: [] })
  })

  it('still takes a damaged archive and a damaged receipt, so that the check can say what is wrong', async () => {
    const zip = file('proof.zip', 'no zip at all')
    const receipt = file('receipt.json', '')
    const cut = file('cut.json', 'ipt"}')
    const sorted = await sortFiles([zip, receipt, cut])
    expect(sorted.archive).toBe(zip)
    expect(sorted.receipts).toEqual([cut])
    expect(sorted.refused).toEqual([{ name: 'receipt.json', why: 'It is empty.' }])
  })

  it('refuses by name what is neither, too long, a second archive, or cannot be read', async () => {
    const folder = file('folder', 'x')
    Object.defineProperty(folder, 'slice', {
      value: () => ({ arrayBuffer: () => Promise.reject(new Error('a folder')) }),
    })
    const { archive, receipts, refused } = await sortFiles([
      file('holiday.jpg', '\u00ff\u00d8'),
      long('long.json', '{', 50 * 2 ** 20),
      long('huge.zip', 'PK', 2 ** 31),
      file('one.zip', 'PK'),
      file('two.zip', 'PK'),
      folder,
    ])
    expect(archive?.name).toBe('one.zip')
    expect(receipts).toEqual([])
    expect(refused.map(({ name }) => name)).toEqual(['holiday.jpg', 'long.json', 'huge.zip', 'two.zip', 'folder'])
    expect(refused[1]?.why).toBe('It is 52.4 MB long, and no receipt is longer than 1 MB.')
    expect(refused[3]?.why).toContain('one.zip is it')
  })

  it('knows a certificate by its first line or its name, and refuses one that is far too long', async () => {
    const pem = file('authority', '-----BEGIN CERTIFICATE-----')
    const crt = file('authority.crt', '\u0030\u0082')
    const { certificates, refused } = await sortFiles([pem, crt, long('long.pem', '-----', 2 ** 24)])
    expect(certificates).toEqual([pem, crt])
    expect(refused.map(({ name }) => name)).toEqual(['long.pem'])
  })

  it('takes a file of exactly the longest receipt, and not a byte more', async () => {
    const { receipts, refused } = await sortFiles([long('a.json', '{', 2 ** 20), long('b.json', '{', 2 ** 20 + 1)])
    expect(receipts.map(({ name }) => name)).toEqual(['a.json'])
    expect(refused.map(({ name }) => name)).toEqual(['b.json'])
  })
})
