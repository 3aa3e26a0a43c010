import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { checkVectorFile, runVectors } from '#server/cli/vectors/run-vectors.ts'

const FOLDER = join(import.meta.dirname, '../../vectors')
type Json = null | boolean | number | string | Json[] | { [name: string]: Json }

async function load(name: string): Promise<Json> {
  return JSON.parse(await readFile(join(FOLDER, name), 'utf8')) as Json
}

/** Every place of a value that holds no object or list. */
function* places(value: Json, path: readonly (string | number)[] = []): Generator<readonly (string | number)[]> {
  if (typeof value !== 'object' || value === null) yield path
  else for (const [key, inner] of Object.entries(value)) yield* places(inner, [...path, key])
}

/** A copy of a value in which the thing at `path` is another one of the same kind. */
function altered(value: Json, path: readonly (string | number)[]): Json {
  const [key, ...rest] = path
  if (key === undefined) return other(value)
  const copy = (Array.isArray(value) ? [...value] : { ...(value as object) }) as { [name: string]: Json }
  copy[key] = altered(copy[key] as Json, rest)
  return copy as Json
}

function other(value: Json): Json {
  if (typeof value === 'number') return value + 1
  if (typeof value === 'boolean') return !value
  if (typeof value !== 'string') return 'x'
  if (/^[0-9a-f]{16,}$/.test(value)) return value.slice(0, -1) + (value.endsWith('0') ? '1' : '0')
  if (/^[01]+$/.test(value)) return (value.startsWith('0') ? '1' : '0') + value.slice(1)
  if (/^[HT]{2,}$/.test(value)) return (value.startsWith('H') ? 'T' : 'H') + value.slice(1)
  return value === 'H' ? 'T' : value === 'T' ? 'H' : `${value}x`
}

const check = (value: Json) => checkVectorFile('f.json', new TextEncoder().encode(JSON.stringify(value)))

describe('every single value of a vector file is checked', () => {
  test.each([
    ['draw-village.json'],
    ['draw-hall-every-ticket.json'],
    ['draw-runs-dry.json'],
    ['sum-trees.json'],
    ['extractors.json'],
    ['flips.json'],
  ])('%s: an alteration anywhere is found', async (name) => {
    const value = await load(name)
    expect(check(value).holds).toBe(true)
    const missed: string[] = []
    let tried = 0
    for (const path of places(value)) {
      // Of the long lists every eleventh place will do; the members at the top are all tried.
      tried += 1
      if (path.length > 2 && tried % 11 !== 0) continue
      // A single toss gives no bits, however it falls.
      if (name === 'extractors.json' && path.join('.') === '1.tosses') continue
      if (check(altered(value, path)).holds) missed.push(path.join('.'))
    }
    expect(tried).toBeGreaterThan(5)
    expect(missed).toEqual([])
  })

  test('a coin that falls otherwise, or uses other flips, is found with its case and field', async () => {
    const coins = (await load('coins.json')) as { [name: string]: Json }[]
    for (const i of coins.keys()) {
      for (const field of ['used', 'heads']) {
        const outcome = check(altered(coins, [i, field]))
        expect(outcome.holds).toBe(false)
        expect(outcome.words).toContain(`case ${i}, ${field}:`)
      }
    }
  })

  test('the development chain: every parameter, signature and randomness', async () => {
    const chain = await load('development-chain.json')
    for (const path of [['secret'], ['publicKey'], ['chain'], ['genesisTime'], ['period'], ['scheme']]) {
      expect(check(altered(chain, path)), path.join('.')).toMatchObject({ holds: false })
    }
    for (const field of ['round', 'signature', 'randomness', 'ok']) {
      const outcome = check(altered(chain, ['rounds', 1, field]))
      expect(outcome.holds).toBe(false)
      expect(outcome.words).toContain('rounds[1]')
    }
  })

  test('a field that is missing, unknown or doubled is named', async () => {
    const draw = (await load('draw-one-entrant.json')) as { [name: string]: Json }
    const { drawKey: _, ...without } = draw
    expect(check(without).words).toContain('drawKey: this field is missing')
    expect(check({ ...draw, extra: 1 }).words).toContain('extra: this field is unknown')
    const doubled = JSON.stringify(draw).replace('{', '{"mode":"derived",')
    expect(checkVectorFile('f.json', new TextEncoder().encode(doubled)).words).toContain('stands here twice')
  })
})

describe('npm run vectors', () => {
  let folder: string
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), 'vectors-'))
  })
  afterAll(async () => {
    await rm(folder, { recursive: true })
  })

  test('prints a line for each file and stops at the first wrong one', async () => {
    const coins = (await load('coins.json')) as Json[]
    await writeFile(join(folder, 'a.json'), JSON.stringify(coins))
    await writeFile(join(folder, 'b.json'), JSON.stringify(altered(coins, [3, 'heads'])))
    await writeFile(join(folder, 'c.json'), JSON.stringify(coins))
    const lines: string[] = []
    expect(await runVectors(folder, (line) => lines.push(line))).toBe(false)
    expect(lines).toEqual([
      'ok   a.json: 36 coins: all values hold',
      'FAIL b.json: case 3, heads: the file says false, computed is true',
    ])
  })

  test.each([
    ['no file at all', {}],
    ['a file of another shape', { 'a.json': '{"hello":1}' }],
    ['a file that is not JSON', { 'a.json': 'nothing' }],
    ['an empty list', { 'a.json': '[]' }],
  ])('fails for a folder with %s', async (_, files: Record<string, string>) => {
    const empty = await mkdtemp(join(tmpdir(), 'vectors-'))
    for (const [name, text] of Object.entries(files)) await writeFile(join(empty, name), text)
    const lines: string[] = []
    expect(await runVectors(empty, (line) => lines.push(line))).toBe(false)
    expect(lines.length).toBe(1)
    await rm(empty, { recursive: true })
  })

  test('fails for a folder that is not there', async () => {
    expect(await runVectors(join(folder, 'missing'), () => undefined)).toBe(false)
  })
})
