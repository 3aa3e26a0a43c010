import { Readable } from 'node:stream'
import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { CommandError } from '#server/commands/command-error.ts'
import { addEntrant } from '#server/commands/entrants/add-entrant.ts'
import { applyImport } from '#server/commands/entrants/apply-import.ts'
import { discardImport } from '#server/commands/entrants/discard-import.ts'
import { removeEntrant } from '#server/commands/entrants/remove-entrant.ts'
import { updateEntrant } from '#server/commands/entrants/update-entrant.ts'
import { uploadImport } from '#server/commands/entrants/upload-import.ts'
import { listEntrants } from '#server/store/queries/entrants.ts'
import { getImport } from '#server/store/queries/imports.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrantImport, entrantPerson, importRow } from '#server/store/schema/entrant.ts'
import { auditDetail, auditEvent } from '#server/store/schema/record.ts'
import { MAX_FILE_BYTES } from '#shared/entrants/file-limit.ts'
import { csv, importCsv, makeClosed, makeDraft, makeOffice, makeOpen, type Office } from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite()
  office = await makeOffice(site.services)
})
afterAll(() => site.close())

async function refusal(action: Promise<unknown>): Promise<CommandError> {
  try {
    await action
  } catch (error) {
    if (error instanceof CommandError) return error
    throw error
  }
  throw new Error('The command let this pass.')
}
const counts = async (id: string) =>
  (
    await site.services.db
      .select({ entrants: draw.entrantCount, tickets: draw.ticketCount })
      .from(draw)
      .where(eq(draw.id, id))
  )[0]
const empty = () => makeOpen(site.services, office, { entrants: [] })
const staged = async (id: string) => site.services.db.$count(importRow, eq(importRow.importId, id))
const list = (id: string, more: Partial<Parameters<typeof listEntrants>[1]> = {}) =>
  listEntrants(site.services.db, { draw: id, q: '', sort: 'added', direction: 'up', page: 1, ...more })

describe('an import', () => {
  it('is looked through before anything joins the list, and brought in once', async () => {
    const id = await empty()
    const text = csv(
      ['Ada Quill,5,ada@people.example,1-5', 'Bram "Bo" Osei,1,,', 'Ṡean\\tab,2,,"A7, A9"'].map((row) =>
        row.replace('Bram "Bo" Osei', '"Bram ""Bo"" Osei"'),
      ),
    )
    const made = await importCsv(site.services, office, id, text)
    expect(await getImport(site.services.db, { draw: id, import: made })).toMatchObject({
      state: 'ready',
      entrants: 3,
      tickets: 8,
      errorCount: 0,
      bytesRead: Buffer.byteLength(text),
      createdBy: 'Odile Brandt',
      preview: [
        { row: 2, name: 'Ada Quill', tickets: 5, label: 'Ada Q.', email: 'ada@people.example', numbers: '1-5' },
        { row: 3, name: 'Bram "Bo" Osei' },
        { row: 4, name: 'Ṡean\\tab', numbers: 'A7, A9' },
      ],
    })
    expect(await counts(id)).toEqual({ entrants: 0, tickets: 0 })
    const input = { draw: id, import: made }
    await Promise.all([
      applyImport(site.services, office.promoter, input),
      applyImport(site.services, office.promoter, input),
    ])
    await applyImport(site.services, office.promoter, input)
    expect(await counts(id)).toEqual({ entrants: 3, tickets: 8 })
    expect(await staged(made)).toBe(0)
    const { items } = await list(id)
    expect(items.map(({ name, tickets, source }) => [name, tickets, source])).toEqual([
      ['Ada Quill', 5, 'import'],
      ['Bram "Bo" Osei', 1, 'import'],
      ['Ṡean\\tab', 2, 'import'],
    ])
    expect(new Set(items.map(({ code }) => code)).size).toBe(3)
    expect((await refusal(discardImport(site.services, office.promoter, input))).message).toContain(
      'in the list already',
    )
  })
  it('with a fault keeps no row and cannot be brought in', async () => {
    const id = await empty()
    const made = await importCsv(
      site.services,
      office,
      id,
      csv(['Ada Quill,5,,', 'Bram Osei,0,,', '=cmd(),1,,', 'Cleo Ferrant,2,,', 'Dov Halloran,1.5,,']),
    )
    const view = await getImport(site.services.db, { draw: id, import: made })
    expect(view).toMatchObject({ state: 'faulty', errorCount: 3, preview: [] })
    expect(view?.errors.map(({ row, column }) => [row, column])).toEqual([
      [3, 'tickets'],
      [4, 'name'],
      [6, 'tickets'],
    ])
    expect(await staged(made)).toBe(0)
    const applied = applyImport(site.services, office.promoter, { draw: id, import: made })
    expect((await refusal(applied)).message).toContain('only one without errors')
    expect(await counts(id)).toEqual({ entrants: 0, tickets: 0 })
  })
  it('brings in nothing where a ticket number is held already', async () => {
    const id = await makeOpen(site.services, office)
    const made = await importCsv(site.services, office, id, csv(['Eve Lund,2,,40-41', 'Finn Roe,3,,5-7']))
    expect((await refusal(applyImport(site.services, office.promoter, { draw: id, import: made }))).message).toContain(
      'nothing was brought in',
    )
    expect(await counts(id)).toEqual({ entrants: 4, tickets: 11 })
    expect((await getImport(site.services.db, { draw: id, import: made }))?.state).toBe('ready')
    await discardImport(site.services, office.promoter, { draw: id, import: made })
    expect(await staged(made)).toBe(0)
  })
  it('that breaks off half-way leaves nothing but a note', async () => {
    const id = await empty()
    const abort = new AbortController()
    async function* half(): AsyncGenerator<Uint8Array> {
      yield Buffer.from(csv(Array.from({ length: 9000 }, (_, index) => `Person ${index},1,,`)))
      abort.abort(new Error('gone'))
      yield Buffer.from('More')
    }
    const upload = uploadImport(site.services, office.promoter, {
      draw: id,
      fileName: 'half.csv',
      bytesTotal: 400_000,
      stream: half(),
      signal: abort.signal,
    })
    await expect(upload).rejects.toThrow('gone')
    const [row] = await site.services.db.select().from(entrantImport).where(eq(entrantImport.drawId, id))
    expect(row).toMatchObject({
      state: 'failed',
      failure: expect.stringContaining('Nothing was stored; upload it again.'),
    })
    expect(await staged(row?.id ?? '')).toBe(0)
  })
  it('is refused beyond 200 MB, without being kept in memory', async () => {
    const id = await empty()
    const line = Buffer.from(`${'Ada Quill,1,,'.padEnd(60_000, ' ')}\n`)
    async function* endless(): AsyncGenerator<Uint8Array> {
      yield Buffer.from('name,tickets,email,numbers\n')
      for (let sent = 0; sent < MAX_FILE_BYTES + line.length; sent += line.length) yield line
    }
    const upload = uploadImport(site.services, office.promoter, {
      draw: id,
      fileName: 'large.csv',
      bytesTotal: 0,
      stream: endless(),
    })
    expect((await refusal(upload)).fields).toMatchObject([
      { field: 'file', message: expect.stringContaining('larger than 200 MB') },
    ])
    const [row] = await site.services.db.select().from(entrantImport).where(eq(entrantImport.drawId, id))
    expect(row?.state).toBe('failed')
    expect(await staged(row?.id ?? '')).toBe(0)
  }, 120_000)
  it.each([
    ['draft', makeDraft],
    ['closed', makeClosed],
  ] as const)('is refused while the draw is %s', async (state, make) => {
    const id = await make(site.services, office)
    const stream = Readable.from([Buffer.from(csv(['Ada Quill,1,,']))])
    const upload = uploadImport(site.services, office.promoter, {
      draw: id,
      fileName: 'late.csv',
      bytesTotal: 1,
      stream,
    })
    expect((await refusal(upload)).message).toBe(`This draw is ${state}: you cannot import entrants now.`)
    const added = addEntrant(site.services, office.promoter, {
      draw: id,
      entrant: { name: 'Nell Okoro', tickets: 3, label: null, email: null, phone: null, numbers: null },
    })
    expect((await refusal(added)).message).toBe(`This draw is ${state}: you cannot add entrants now.`)
  })
})

describe('entrants by hand', () => {
  const given = { name: 'Nell Okoro', tickets: 3, label: null, email: null, phone: null, numbers: '90-92' }
  it('are added, changed from the version that was read, and taken out with a reason', async () => {
    const id = await makeOpen(site.services, office)
    const { id: entrant } = await addEntrant(site.services, office.promoter, { draw: id, entrant: given })
    expect(await counts(id)).toEqual({ entrants: 5, tickets: 14 })
    const change = () =>
      updateEntrant(site.services, office.promoter, {
        draw: id,
        entrant,
        version: 1,
        values: { ...given, tickets: 4, numbers: '90-93' },
      })
    await change()
    expect((await refusal(change())).code).toBe('changed')
    expect(await counts(id)).toEqual({ entrants: 5, tickets: 15 })
    await removeEntrant(site.services, office.promoter, { draw: id, entrant, reason: 'Paid back.' })
    expect(await counts(id)).toEqual({ entrants: 4, tickets: 11 })
    expect(await site.services.db.select().from(entrantPerson).where(eq(entrantPerson.entrantId, entrant))).toEqual([])
    // The numbers are free again.
    await addEntrant(site.services, office.promoter, { draw: id, entrant: { ...given, name: 'Otis Pratt' } })
  })
  it('cannot hold a number that somebody else holds', async () => {
    const id = await makeOpen(site.services, office)
    const added = addEntrant(site.services, office.promoter, { draw: id, entrant: { ...given, numbers: '3' } })
    expect((await refusal(added)).fields).toMatchObject([{ field: 'numbers' }])
    expect(await counts(id)).toEqual({ entrants: 4, tickets: 11 })
  })
  it('leave their names in the side table of the audit trail only', async () => {
    const id = await makeOpen(site.services, office)
    await addEntrant(site.services, office.promoter, { draw: id, entrant: given })
    const events = await site.services.db.select().from(auditEvent).where(eq(auditEvent.drawId, id))
    expect(JSON.stringify(events)).not.toMatch(/Nell|Okoro|Odile/)
    const details = await site.services.db.select().from(auditDetail)
    expect(details.some(({ sentence }) => sentence.startsWith('Added Nell Okoro ('))).toBe(true)
  })
})

describe('the table of entrants', () => {
  it('finds, sorts and pages on the server', async () => {
    const rows = Array.from(
      { length: 120 },
      (_, index) => `Person ${String(index).padStart(3, '0')},${120 - index},p${index}@people.example,`,
    )
    const id = await makeOpen(site.services, office, { entrants: [...rows, '100% Ölkanne,7,oil_can@people.example,'] })
    expect(await list(id)).toMatchObject({ total: 121, tickets: 7267, page: 1, pageSize: 50 })
    expect((await list(id, { page: 3 })).items).toHaveLength(21)
    expect((await list(id, { sort: 'tickets', direction: 'down' })).items[0]).toMatchObject({
      name: 'Person 000',
      tickets: 120,
    })
    expect((await list(id, { sort: 'name', direction: 'down' })).items[0]?.name).toBe('Person 119')
    expect(await list(id, { q: 'person 01' })).toMatchObject({ total: 10, tickets: 1055 })
    expect((await list(id, { q: 'P7@people' })).items.map(({ name }) => name)).toEqual(['Person 007'])
    // What means something to LIKE is taken as it is typed.
    expect((await list(id, { q: '%' })).items.map(({ name }) => name)).toEqual(['100% Ölkanne'])
    expect((await list(id, { q: 'l_c' })).items.map(({ name }) => name)).toEqual(['100% Ölkanne'])
    expect((await list(id, { q: 'ÖLK' })).total).toBe(1)
    const code = (await list(id)).items[4]?.code ?? ''
    expect((await list(id, { q: code.toLowerCase() })).items.map((item) => item.code)).toEqual([code])
  })
})
