/**
 * Reads a QR code of byte mode out of its picture, by ISO/IEC 18004 (tables from memory): the mask from the format bits, the
 * zigzag of codewords, and the blocks of versions 1 to 6 at level M put in order. It corrects no errors; our own picture has
 * none. Shares nothing with the code that draws.
 */
export function readQr(picture: XMLDocument): string {
  const dark = modulesOf(picture)
  const size = dark.length
  const version = (size - 17) / 4
  const shape = BLOCKS[version]
  if (!shape) throw new Error(`This reader knows no version ${version}.`)
  const at = (row: number, column: number) => dark[row]?.[column] ?? false
  let format = 0
  for (const column of [0, 1, 2, 3, 4, 5, 7, 8]) format = format * 2 + Number(at(8, column))
  for (const row of [7, 5, 4, 3, 2, 1, 0]) format = format * 2 + Number(at(row, 8))
  const plain = format ^ 0b101010000010010
  if (plain >> 13 !== 0) throw new Error('The level is not M.')
  const mask = MASKS[(plain >> 10) & 7] as (row: number, column: number) => boolean

  const bits: boolean[] = []
  let up = true
  for (let right = size - 1; right > 0; right -= 2) {
    if (right === 6) right -= 1
    for (let step = 0; step < size; step += 1) {
      const row = up ? size - 1 - step : step
      for (const column of [right, right - 1]) {
        if (!isFunction(row, column, size, version)) bits.push(at(row, column) !== mask(row, column))
      }
    }
    up = !up
  }
  const words: number[] = []
  for (let i = 0; i + 8 <= bits.length; i += 8) {
    words.push(bits.slice(i, i + 8).reduce((value, bit) => value * 2 + Number(bit), 0))
  }
  const blocks = Array.from({ length: shape.blocks }, () => [] as number[])
  for (let i = 0; i < shape.data; i += 1) for (const block of blocks) block.push(words.shift() as number)
  const data = blocks.flat().flatMap((word) => [word >> 4, word & 15])
  if (data.shift() !== 4) throw new Error('The mode is not bytes.')
  const nibble = () => data.shift() as number
  const length = nibble() * 16 + nibble()
  return Buffer.from(Array.from({ length }, () => nibble() * 16 + nibble())).toString('utf8')
}

/** Level M: blocks, and data codewords in each. */
const BLOCKS: Readonly<Record<number, { blocks: number; data: number }>> = {
  1: { blocks: 1, data: 16 },
  2: { blocks: 1, data: 28 },
  3: { blocks: 1, data: 44 },
  4: { blocks: 2, data: 32 },
  5: { blocks: 2, data: 43 },
  6: { blocks: 4, data: 27 },
}

const MASKS: readonly ((row: number, column: number) => boolean)[] = [
  (i, j) => (i + j) % 2 === 0,
  (i) => i % 2 === 0,
  (_, j) => j % 3 === 0,
  (i, j) => (i + j) % 3 === 0,
  (i, j) => (Math.floor(i / 2) + Math.floor(j / 3)) % 2 === 0,
  (i, j) => ((i * j) % 2) + ((i * j) % 3) === 0,
  (i, j) => (((i * j) % 2) + ((i * j) % 3)) % 2 === 0,
  (i, j) => (((i + j) % 2) + ((i * j) % 3)) % 2 === 0,
]

function isFunction(row: number, column: number, size: number, version: number): boolean {
  if (row === 6 || column === 6) return true
  if ((row < 9 && column < 9) || (row < 9 && column >= size - 8) || (row >= size - 8 && column < 9)) return true
  if (version === 1) return false
  const middle = size - 7
  return Math.abs(row - middle) <= 2 && Math.abs(column - middle) <= 2
}

/** The dark modules, without the four light ones around. */
function modulesOf(picture: XMLDocument): boolean[][] {
  const side = Number(picture.documentElement.getAttribute('viewBox')?.split(' ')[2])
  const drawn = Array.from({ length: side }, () => Array.from({ length: side }, () => false))
  const path = picture.querySelector('path[fill="#000"]')?.getAttribute('d') ?? ''
  for (const [, x, y, width] of path.matchAll(/M(\d+) (\d+)h(\d+)v1h-\d+z/g)) {
    for (let i = 0; i < Number(width); i += 1) (drawn[Number(y)] as boolean[])[Number(x) + i] = true
  }
  const quiet = drawn.every((row, y) =>
    row.every((dark, x) => !dark || Math.min(x, y, side - 1 - x, side - 1 - y) >= 4),
  )
  if (!quiet) throw new Error('The code has no quiet zone.')
  return drawn.slice(4, -4).map((row) => row.slice(4, -4))
}
