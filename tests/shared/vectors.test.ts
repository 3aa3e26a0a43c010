import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { checkVectorFile } from '#server/cli/vectors/run-vectors.ts'

// Check values of the record format, made by a separate implementation.
const FOLDER = join(import.meta.dirname, '../vectors')
const files = readdirSync(FOLDER).filter((name) => name.endsWith('.json'))

describe('the vectors of the record format', () => {
  test('there are thirteen files, eight of them whole draws', () => {
    expect(files.length).toBe(13)
    expect(files.filter((name) => name.startsWith('draw-')).length).toBe(8)
  })
  test.each(files)('%s holds', (name) => {
    // Told apart by their fields: the name that is passed says nothing.
    const outcome = checkVectorFile('a.json', readFileSync(join(FOLDER, name)))
    expect(outcome).toMatchObject({ holds: true })
  })
})
