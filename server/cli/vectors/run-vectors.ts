import { readdir, readFile } from 'node:fs/promises'
import { join } from 'node:path'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { parseStrictJson } from '#shared/bytes/strict-json.ts'
import { CHAIN_FIELDS, checkChain } from './chain-vectors.ts'
import { checkDraw, DRAW_FIELDS } from './draw-vectors.ts'
import {
  checkCoin,
  checkExtractor,
  checkFlips,
  COIN_FIELDS,
  EXTRACTOR_FIELDS,
  FLIPS_FIELDS,
} from './sampling-vectors.ts'
import { checkSumTree, SUM_TREE_FIELDS } from './tree-vectors.ts'
import { isObject, WrongValue } from './wrong-value.ts'

/** One kind of file: how it is told, and its check, which returns what it has checked, in words. */
interface Kind {
  readonly fields: readonly string[]
  check(value: unknown): string
}

const LISTS: readonly Kind[] = [
  { fields: COIN_FIELDS, check: eachCase('coins', checkCoin) },
  { fields: EXTRACTOR_FIELDS, check: eachCase('toss strings', checkExtractor) },
  { fields: FLIPS_FIELDS, check: eachCase('streams of flips', checkFlips) },
  { fields: SUM_TREE_FIELDS, check: eachCase('sum trees', checkSumTree) },
]
const OBJECTS: readonly Kind[] = [
  { fields: CHAIN_FIELDS, check: (value) => `a beacon chain with ${checkChain('chain', value)} rounds` },
  { fields: DRAW_FIELDS, check: (value) => `a draw with ${checkDraw(value)} picks` },
]

/** What came of one file: `holds` with what was checked, or the first thing wrong. */
export interface FileOutcome {
  readonly file: string
  readonly holds: boolean
  readonly words: string
}

/** Checks one file's bytes; the kind is told by its fields, never by its name. */
export function checkVectorFile(file: string, bytes: Uint8Array): FileOutcome {
  const text = decodeUtf8(bytes)
  if (text === null) return { file, holds: false, words: 'is not UTF-8 text' }
  const json = parseStrictJson(text, 32)
  if (!json.ok) return { file, holds: false, words: `at character ${json.error.at}: ${json.error.message}` }
  const kind = kindOf(json.value)
  if (kind === null) return { file, holds: false, words: 'has none of the shapes that this command knows' }
  try {
    return { file, holds: true, words: `${kind.check(json.value)}: all values hold` }
  } catch (error) {
    if (error instanceof WrongValue) return { file, holds: false, words: error.message }
    throw error
  }
}

/**
 * Runs every `.json` file of a folder in the order of their names and stops at the first wrong value. `print` gets a
 * line a file. Returns whether all of them hold; a folder without a file to run does not.
 */
export async function runVectors(folder: string, print: (line: string) => void): Promise<boolean> {
  let names: string[]
  try {
    names = (await readdir(folder)).filter((name) => name.endsWith('.json')).sort()
  } catch (error) {
    print(`${folder}: cannot be read (${error instanceof Error ? error.message : String(error)})`)
    return false
  }
  if (names.length === 0) {
    print(`${folder}: holds no .json file with vectors`)
    return false
  }
  for (const name of names) {
    const outcome = checkVectorFile(name, await readFile(join(folder, name)))
    print(`${outcome.holds ? 'ok  ' : 'FAIL'} ${outcome.file}: ${outcome.words}`)
    if (!outcome.holds) return false
  }
  return true
}

/**
 * The kind whose fields a value has most of: a file with one field missing or one too many is still of its kind, and
 * its check then names the field.
 */
function kindOf(value: unknown): Kind | null {
  const sample = Array.isArray(value) ? value.find(isObject) : value
  if (!isObject(sample)) return null
  let best: Kind | null = null
  let most = 0
  for (const kind of Array.isArray(value) ? LISTS : OBJECTS) {
    const share = kind.fields.filter((field) => Object.hasOwn(sample, field)).length / kind.fields.length
    if (share > most) {
      best = kind
      most = share
    }
  }
  return most > 0.5 ? best : null
}

function eachCase(words: string, check: (name: string, value: unknown) => void): (value: unknown) => string {
  return (value) => {
    const cases = value as readonly unknown[]
    for (const [i, item] of cases.entries()) check(`case ${i}`, item)
    return `${cases.length} ${words}`
  }
}
