import { describe, expect, it } from 'vitest'
import { readEntrantCsv } from '#server/commands/entrants/read-entrant-csv.ts'
import type { EntrantRow } from '#shared/entrants/entrant-csv.ts'

async function* pieces(bytes: Uint8Array, length: number) {
  for (let at = 0; at < bytes.length; at += length) yield bytes.subarray(at, at + length)
}

async function read(content: string | Uint8Array, pieceLength = 7) {
  const bytes = typeof content === 'string' ? new TextEncoder().encode(content) : content
  const entrants: EntrantRow[] = []
  const result = await readEntrantCsv(pieces(bytes, pieceLength), {
    onEntrant: (entrant) => void entrants.push(entrant),
  })
  return { ...result, entrants }
}

describe('a sound file', () => {
  it('gives its entrants, wherever the pieces of the stream are cut', async () => {
    const csv =
      '\uFEFFName,TICKETS , email,phone,numbers,label,Table\r\n' +
      '"Okafor, Blessing",3,b.okafor@post.example,+44 20 7946 0011,"101-103",,4\r\n' +
      '\r\n' +
      'Rune Østergård,4294967295,,,,Rune from the choir,\r\n' +
      'Zoe\u0308,1\r\n'
    for (const length of [1, 2, 3, 64, 10_000]) {
      const { entrants, problems, notes, totals } = await read(csv, length)
      expect(problems).toEqual([])
      expect(entrants).toEqual([
        {
          row: 2,
          name: 'Okafor, Blessing',
          tickets: 3,
          email: 'b.okafor@post.example',
          phone: '+44 20 7946 0011',
          numbers: '101-103',
          ranges: [{ series: '', from: 101, to: 103 }],
          label: 'Blessing O.',
        },
        expect.objectContaining({ row: 4, name: 'Rune Østergård', tickets: 2 ** 32 - 1, label: 'Rune from the choir' }),
        expect.objectContaining({ row: 5, name: 'Zo\u00eb', tickets: 1, label: 'Zo\u00eb' }),
      ])
      expect(totals).toEqual({ entrants: 3, tickets: 2 ** 32 + 3 })
      expect(notes).toEqual([
        { row: 1, code: 'column-ignored', message: 'The column "Table" is not used and will not be stored.' },
      ])
    }
  })

  it.each([
    [';', 'name;tickets\n"Idris; Farah";2\n'],
    ['\t', 'name\ttickets\nIdris; Farah\t2\n'],
  ])('may have %j between its cells', async (_delimiter, csv) => {
    const { entrants, problems } = await read(csv)
    expect(problems).toEqual([])
    expect(entrants).toEqual([expect.objectContaining({ name: 'Idris; Farah', tickets: 2 })])
  })

  it('says where tickets and ticket numbers differ, and goes on', async () => {
    const { entrants, notes } = await read('name,tickets,numbers\nPia Lund,5,11 to 14\n')
    expect(entrants).toHaveLength(1)
    expect(notes).toMatchObject([{ row: 2, code: 'numbers-and-tickets-differ' }])
    expect(notes[0]?.message).toContain('come to 4')
  })
})

describe('a file that is refused', () => {
  const head = 'name,tickets,email,phone,numbers,label\n'
  const cases: [string, string | Uint8Array, number, string, RegExp][] = [
    ['empty', '', 1, 'file-empty', /first row must name the columns/],
    ['white space only', '\n \n\n', 1, 'file-empty', /empty/],
    ['column names only', head, 2, 'no-entrants', /Add a row for each entrant/],
    ['no tickets column', 'name,count\nA,1\n', 1, 'column-missing', /no column called tickets.*"name", "count"/],
    ['no column names', 'Ola Nyberg,4\n', 1, 'column-missing', /called name and none called tickets/],
    ['a column twice', 'name,tickets,Name\nA,1,B\n', 1, 'column-doubled', /two columns are called name/],
    ['no name', `${head}  ,4\n`, 2, 'name-missing', /Write one, or delete the row/],
    ['no tickets', `${head}Ola,\n`, 2, 'tickets-missing', /whole number, 1 or more/],
    ['a row with a name only', `${head}Ola\n`, 2, 'tickets-missing', /^Row 2: /],
    ['zero', `${head}Ola,1\nUna,0\n`, 3, 'tickets-zero', /^Row 3: .*delete the row/],
    ['negative', `${head}Ola,-3\n`, 2, 'tickets-negative', /less than none/],
    ['fractional', `${head}Ola,2.5\n`, 2, 'tickets-fractional', /not a whole number/],
    ['a fraction with a comma', `${head}Ola,"2,5"\n`, 2, 'tickets-fractional', /without a fraction/],
    ['huge', `${head}Ola,4294967296\n`, 2, 'tickets-huge', /4,294,967,295/],
    ['very huge', `${head}Ola,${'9'.repeat(180)}\n`, 2, 'tickets-huge', /more than/],
    ['thousands', `${head}Ola,"1,000"\n`, 2, 'tickets-unreadable', /plain digits/],
    ['words', `${head}Ola,ten\n`, 2, 'tickets-unreadable', /in digits, like 25/],
    ['an exponent', `${head}Ola,1e3\n`, 2, 'tickets-unreadable', /in digits/],
    ['zeros in front', `${head}Ola,007\n`, 2, 'tickets-unreadable', /write "007" without zeros in front, like 7\./],
    ['other digits', `${head}Ola,٣\n`, 2, 'tickets-unreadable', /in digits/],
    ['a plus', `${head}Ola,+3\n`, 2, 'tickets-unreadable', /in digits/],
    ['a formula for tickets', `${head}Ola,=SUM(B2:B9)\n`, 2, 'tickets-formula', /Write the number itself/],
    ['a formula for a name', `${head}"=HYPERLINK(""x"")",1\n`, 2, 'formula', /name begins with = as a formula/],
    ['an at sign', `${head}@ola,1\n`, 2, 'formula', /begins with @/],
    ['a minus in a label', `${head}Ola,1,,,,-Ola\n`, 2, 'formula', /label begins with -/],
    ['a plus in an e-mail', `${head}Ola,1,+ola@post.example\n`, 2, 'formula', /email begins with \+/],
    ['a command after a plus in a phone', `${head}Ola,1,,+1+cmd|calc\n`, 2, 'formula', /phone begins with \+/],
    ['a bad e-mail', `${head}Ola,1,ola at post\n`, 2, 'email-unreadable', /not an e-mail address/],
    ['a bad phone', `${head}Ola,1,,none\n`, 2, 'phone-unreadable', /not a telephone number/],
    ['unreadable numbers', `${head}Ola,1,,,book seven\n`, 2, 'numbers-unreadable', /like 101-120, 133/],
    ['numbers backwards', `${head}Ola,1,,,20-11\n`, 2, 'numbers-unreadable', /run backwards/],
    ['numbers of two series', `${head}Ola,1,,,A1-B9\n`, 2, 'numbers-unreadable', /different letters/],
    ['too many cells', `name,tickets\nNyberg, Ola,3\n`, 2, 'too-many-cells', /3 cells.*names 2 columns/],
    ['a long text', `${head}${'n'.repeat(201)},1\n`, 2, 'text-too-long', /longer than 200/],
    ['a control character', `${head}Ola\u0007,1\n`, 2, 'text-refused', /control character/],
    ['two lines in a cell', `${head}"Ola\nNyberg",1\n`, 2, 'text-refused', /control character/],
    ['a turned-round text', `${head}\u202eOla,1\n`, 2, 'text-refused', /direction/],
    ['a lost character', `${head}Ren\uFFFDe,1\n`, 2, 'encoding', /CSV UTF-8/],
    ['Latin-1', Buffer.from(`${head}Ola,1\nRen\xe9e,1\n`, 'latin1'), 3, 'encoding', /no longer UTF-8/],
    ['Latin-1 at the start of a row', Buffer.from(`${head}Ola,1\n\xc9va,1\n`, 'latin1'), 3, 'encoding', /no longer/],
    [
      'Latin-1 far down',
      Buffer.from(`${head}${'Zo\xc3\xab,1\n'.repeat(12_000)}Ren\xe9e,1\n`, 'latin1'),
      12_002,
      'encoding',
      /^Row 12002: .*no longer UTF-8/,
    ],
    ['Latin-1 inside quotation marks', Buffer.from(`${head}"Ren\xe9e",1\n`, 'latin1'), 2, 'encoding', /no longer/],
    ['UTF-16', Buffer.from(`\uFEFF${head}Ola,1\n`, 'utf16le'), 1, 'encoding', /no longer UTF-8/],
    ['a character cut off at the end', Buffer.from(`${head}Ola,1\nRené`).subarray(0, -1), 3, 'encoding', /no longer/],
    ['a quote that never closes', `${head}Ola,1\n"Una,2\nIda,3\n`, 3, 'quote-not-closed', /^Row 3: .*never closes/],
    ['a quote that closes too late', `${head}"Una,2\n${'x,1\n'.repeat(30_000)}`, 2, 'row-too-long', /probably opens/],
    ['a quote inside a cell', `${head}Ola "Bo" Berg,1\n`, 2, 'quote-misplaced', /middle of a cell/],
  ]
  it.each(cases)('%s', async (_what, content, row, code, message) => {
    for (const length of [5, 65_536]) {
      const { problems } = await read(content, length)
      const first = problems[0]
      expect(first?.code).toBe(code)
      expect(first?.message).toMatch(message)
      expect(first?.row).toBe(row)
    }
  })

  it('names both rows of a ticket number that stands twice, across ranges, series and zeros in front', async () => {
    const { problems } = await read(
      `${head}A,10,,,101-110\nB,3,,,"A7, A9"\nC,1,,,0105\nD,1,,,a9\nE,2,,,"200, 200"\nF,1,,,A105\nG,20,,,90 – 109\n`,
    )
    expect(problems.map(({ row, code, message }) => [row, code, message.replace(/\. .*/s, '.')])).toEqual([
      [4, 'number-doubled', 'Row 4: ticket number 105 is also in row 2.'],
      [5, 'number-doubled', 'Row 5: ticket number A9 is also in row 3.'],
      [6, 'number-doubled', 'Row 6: ticket number 200 stands in it twice.'],
      [8, 'number-doubled', 'Row 8: ticket number 101 is also in row 2.'],
    ])
  })

  it('holds every later number against a long range, not only the next one', async () => {
    const { problems } = await read(`${head}A,100,,,1-100\nB,1,,,5\nC,1,,,50\nD,1,,,101\n`)
    expect(problems.map(({ row }) => row)).toEqual([3, 4])
  })

  it('lists the problems of all rows, up to a limit, and counts the rest', async () => {
    const { problems, problemCount, totals } = await read(`name,tickets\n${'A,0\n'.repeat(250)}B,1\n`, 1000)
    expect(problems).toHaveLength(100)
    expect(problemCount).toBe(250)
    expect(totals).toEqual({ entrants: 1, tickets: 1 })
  })

  it('shows every problem of one row', async () => {
    const { problems } = await read(`${head}=A,x,@b,+c\n`)
    expect(problems.map(({ column, code }) => [column, code])).toEqual([
      ['name', 'formula'],
      ['email', 'formula'],
      ['phone', 'formula'],
    ])
  })
})

it('stops when told to', async () => {
  const controller = new AbortController()
  const endless = (async function* () {
    yield new TextEncoder().encode('name,tickets\n')
    for (;;) yield new TextEncoder().encode('Ola,1\n'.repeat(1000))
  })()
  const reading = readEntrantCsv(endless, {
    onEntrant: ({ row }) => {
      if (row === 5000) controller.abort(new Error('enough'))
    },
    signal: controller.signal,
  })
  await expect(reading).rejects.toThrow('enough')
})
