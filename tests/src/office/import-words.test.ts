import { readFileSync } from 'node:fs'
import { Readable } from 'node:stream'
import { describe, expect, it } from 'vitest'
import { readEntrantCsv } from '#server/commands/entrants/read-entrant-csv.ts'
import { MAX_FILE_BYTES } from '#shared/entrants/file-limit.ts'
import { ENTRANT_COLUMNS, type EntrantColumn } from '#shared/entrants/entrant-header.ts'
import type { EntrantRow } from '#shared/entrants/entrant-csv.ts'
import { fileProblem } from '#src/features/office/import/file-checks.ts'
import { importWords, likeness, readShare, rowList } from '#src/features/office/import/import-words.ts'
import { groupProblems } from '#src/features/office/import/problem-groups.ts'
import { COLUMNS, SAMPLE, SAMPLE_PATH } from '#src/features/office/import/sample.ts'
import { IMPORT_ID, importView } from '#tests/support/office/fixtures.ts'

describe('the example of a sheet', () => {
  it('is the file that can be downloaded, byte for byte', () => {
    expect(readFileSync(`public${SAMPLE_PATH}`, 'utf8')).toBe(SAMPLE)
  })

  it('is read by the site without an error or a remark', async () => {
    const rows: EntrantRow[] = []
    const found = await readEntrantCsv(Readable.from([Buffer.from(SAMPLE)]), {
      onEntrant: (row) => void rows.push(row),
    })
    expect(found.problems).toEqual([])
    expect(found.notes).toEqual([])
    expect(rows.map(({ name, tickets, label }) => [name, tickets, label])).toEqual([
      ['Ottilie Brankscombe', 5, 'Ottilie, Fernhill'],
      ['Deng, Samuel', 2, 'Samuel D.'],
      ['Priyanka Holt', 12, 'Priyanka H.'],
      ['Staff of the post office', 20, 'The staff of the post office'],
    ])
  })

  it('explains every column that the site reads, and no other', () => {
    expect(COLUMNS.map(({ name }) => name as EntrantColumn)).toEqual([...ENTRANT_COLUMNS])
    expect(SAMPLE.split('\n')[0]).toBe(ENTRANT_COLUMNS.join(','))
  })
})

describe('fileProblem', () => {
  it('takes what the server takes, to the byte', () => {
    expect(MAX_FILE_BYTES).toBe(200_000_000)
    expect(fileProblem({ name: 'list.csv', size: MAX_FILE_BYTES })).toBeNull()
    expect(fileProblem({ name: 'list.csv', size: MAX_FILE_BYTES + 1 })).toMatch(/at most 200 MB. Split it/)
  })
  it('knows an empty file and a spreadsheet', () => {
    expect(fileProblem({ name: 'list.csv', size: 0 })).toMatch(/empty/)
    for (const name of ['Books.XLSX', 'books.ods', 'books.numbers']) {
      expect(fileProblem({ name, size: 900 })).toMatch(/save the sheet as “CSV UTF-8”/)
    }
    expect(fileProblem({ name: 'xlsx.csv', size: 900 })).toBeNull()
  })
})

describe('groupProblems', () => {
  const error = (row: number, message: string, column: string | null = 'email') => ({
    row,
    column,
    message: `Row ${row}: ${message}`,
  })

  it('tells a few one by one, without the row that stands beside them', () => {
    expect(groupProblems([error(9, 'there is no name.'), error(4, 'there is no name.')])).toEqual([
      { message: 'There is no name.', column: 'email', rows: [4] },
      { message: 'There is no name.', column: 'email', rows: [9] },
    ])
  })

  it('tells many of a kind together whatever they quote, in the order of the file', () => {
    const alike = [3, 5, 8, 13].map((row) => error(row, `"x${row} \\" y" is not an e-mail address.`))
    const groups = groupProblems([...alike, error(4, 'there is no name.', 'name')])
    expect(groups).toEqual([
      { message: '"x3 \\" y" is not an e-mail address.', column: 'email', rows: [3, 5, 8, 13] },
      { message: 'There is no name.', column: 'name', rows: [4] },
    ])
  })

  it('does not join the same words about different columns, nor different numbers', () => {
    const mixed = ['email', 'phone', 'email', 'phone'].map((column, index) => error(index + 2, 'too long.', column))
    expect(groupProblems(mixed)).toHaveLength(4)
    const doubled = [2, 3, 4, 5].map((row) => error(row, `ticket number 10${row} is also in row 1.`))
    expect(groupProblems(doubled)).toHaveLength(4)
  })

  it('names a row once that has an error twice', () => {
    const alike = [3, 3, 4, 5].map((row) => error(row, 'there is no name.'))
    expect(groupProblems(alike)[0]?.rows).toEqual([3, 4, 5])
  })
})

describe('words about an import', () => {
  it.each([
    [[7], 'Row 7'],
    [[7, 9], 'Rows 7 and 9'],
    [[1200, 9, 12], 'Rows 1,200, 9 and 12'],
    [[1, 2, 3, 4, 5], 'Rows 1, 2, 3 and 2 more'],
  ])('lists the rows %o', (rows, words) => expect(rowList(rows, 3)).toBe(words))

  it('says how far the reading is, never more than whole, and nothing where the size is unknown', () => {
    expect(readShare({ bytesRead: 50, bytesTotal: 200 })).toBe(0.25)
    expect(readShare({ bytesRead: 210, bytesTotal: 200 })).toBe(1)
    expect(readShare({ bytesRead: 50, bytesTotal: 0 })).toBeNull()
  })

  it('says of every import that is not applied that nothing is in the list', () => {
    for (const state of ['faulty', 'discarded', 'failed'] as const) {
      expect(importWords(importView({ state, errorCount: 3 }))).toMatch(/Nothing of it is in the list/)
    }
    expect(importWords(importView({ state: 'ready' }))).toMatch(/2 entrants with 13 tickets. Not in the list yet/)
    expect(importWords(importView({ state: 'applied' }))).toBe('Brought in: 2 entrants with 13 tickets.')
    expect(importWords(importView({ state: 'failed', failure: 'It broke off.' }))).toBe('It broke off.')
  })

  it('sees the same sheet again by its counts or its name, among those brought in only', () => {
    const other = { ...importView({ state: 'applied' }), id: 'another' }
    expect(likeness(importView(), [other])).toBe(other)
    expect(likeness(importView(), [{ ...other, fileName: 'renamed.csv' }])?.id).toBe('another')
    expect(likeness(importView(), [{ ...other, tickets: 14 }])?.id).toBe('another')
    expect(likeness(importView(), [{ ...other, tickets: 14, fileName: 'renamed.csv' }])).toBeUndefined()
    expect(likeness(importView(), [{ ...other, state: 'discarded' }])).toBeUndefined()
    expect(likeness(importView(), [{ ...other, id: IMPORT_ID }])).toBeUndefined()
  })
})
