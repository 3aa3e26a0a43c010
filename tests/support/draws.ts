import { Readable } from 'node:stream'
import { createDraw } from '#server/commands/draws/create-draw.ts'
import { closeDraw } from '#server/commands/draws/close-draw.ts'
import { openDraw } from '#server/commands/draws/open-draw.ts'
import { putPrizes } from '#server/commands/draws/put-prizes.ts'
import { sealDraw } from '#server/commands/draws/seal-draw.ts'
import { applyImport } from '#server/commands/entrants/apply-import.ts'
import { uploadImport } from '#server/commands/entrants/upload-import.ts'
import type { Services } from '#server/services.ts'
import { membership, organisation, person } from '#server/store/schema/people.ts'
import { draw } from '#server/store/schema/draw.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { drawInput, type DrawInput } from '#shared/schemas/api/office.ts'
import { eq } from 'drizzle-orm'

/** Builders that go through the product's own commands. */

export interface Office {
  readonly organisation: string
  readonly organisationId: string
  readonly promoter: { readonly id: string; readonly name: string }
}

let made = 0

/** An approved organisation and its promoter. */
export async function makeOffice(services: Services, options: { readonly demo?: boolean } = {}): Promise<Office> {
  made += 1
  const slug = `quarry-lane-choir-${made}`
  const [owner] = await services.db
    .insert(organisation)
    .values({
      slug,
      name: 'Quarry Lane Choir',
      registration: 'CH 4471',
      address: '2 Quarry Lane',
      about: 'A choir.',
      timeZone: 'Europe/London',
      currency: 'GBP',
      state: 'approved',
      demo: options.demo ?? false,
    })
    .returning()
  const [promoter] = await services.db
    .insert(person)
    .values({ email: `promoter-${made}@choir.example`, name: 'Odile Brandt' })
    .returning()
  if (!owner || !promoter) throw new Error('not made')
  await services.db.insert(membership).values({ organisationId: owner.id, personId: promoter.id, role: 'promoter' })
  return { organisation: slug, organisationId: owner.id, promoter: { id: promoter.id, name: promoter.name } }
}

export function drawValues(
  services: Services,
  changes: Partial<DrawInput> & { readonly drawAtDate?: Date } = {},
): DrawInput {
  const drawAt = changes.drawAtDate ?? new Date(services.clock.now().getTime() + 3600_000)
  const { drawAtDate: _, ...rest } = changes
  return drawInput.parse({
    title: 'Winter hamper draw',
    goodCause: 'New robes',
    promoterName: 'Odile Brandt',
    promoterAddress: '2 Quarry Lane',
    licence: null,
    ticketPrice: { minor: 100, currency: 'GBP' },
    minimumAge: 16,
    terms: 'One ticket, one chance.',
    closesAt: localFromInstant(new Date(drawAt.getTime() - 30 * 60_000), 'Europe/London'),
    drawAt: localFromInstant(drawAt, 'Europe/London'),
    rule: 'one-prize-each',
    reserves: 1,
    ...rest,
  })
}

export async function versionOf(services: Services, drawId: string): Promise<number> {
  const [row] = await services.db.select({ version: draw.version }).from(draw).where(eq(draw.id, drawId))
  if (!row) throw new Error('no draw')
  return row.version
}

export const csv = (rows: readonly string[]): string => `name,tickets,email,numbers\n${rows.join('\n')}\n`

export async function importCsv(services: Services, office: Office, drawId: string, text: string): Promise<string> {
  const bytes = Buffer.from(text)
  const { id } = await uploadImport(services, office.promoter, {
    draw: drawId,
    fileName: 'entrants.csv',
    bytesTotal: bytes.length,
    stream: Readable.from([bytes]),
  })
  return id
}

export const ENTRANTS = [
  'Ada Quill,5,ada@people.example,1-5',
  'Bram Osei,1,,6',
  'Cleo Ferrant,3,cleo@people.example,7-9',
  'Dov Halloran,2,,',
]

export interface DrawOptions extends Partial<DrawInput> {
  readonly drawAtDate?: Date
  readonly entrants?: readonly string[]
}

/** A draft with one prize of two items. */
export async function makeDraft(services: Services, office: Office, options: DrawOptions = {}): Promise<string> {
  const { entrants: _, ...changes } = options
  const { id } = await createDraw(services, office.promoter, {
    organisation: office.organisation,
    draw: drawValues(services, changes),
  })
  await putPrizes(services, office.promoter, {
    draw: id,
    version: 1,
    prizes: [{ name: 'Hamper', quantity: 2, donor: null, description: null, value: null }],
  })
  return id
}

/** An open draw with the entrants, imported. */
export async function makeOpen(services: Services, office: Office, options: DrawOptions = {}): Promise<string> {
  const id = await makeDraft(services, office, options)
  await openDraw(services, office.promoter, { draw: id, version: await versionOf(services, id) })
  const entrants = options.entrants ?? ENTRANTS
  if (entrants.length > 0) {
    const imported = await importCsv(services, office, id, csv(entrants))
    await applyImport(services, office.promoter, { draw: id, import: imported })
  }
  return id
}

export async function makeClosed(services: Services, office: Office, options: DrawOptions = {}): Promise<string> {
  const id = await makeOpen(services, office, options)
  await closeDraw(services, office.promoter, { draw: id, version: await versionOf(services, id) })
  return id
}

export async function makeSealed(services: Services, office: Office, options: DrawOptions = {}): Promise<string> {
  const id = await makeClosed(services, office, options)
  const [row] = await services.db.select().from(draw).where(eq(draw.id, id))
  if (!row) throw new Error('no draw')
  await sealDraw(services, office.promoter, {
    draw: id,
    version: row.version,
    entrants: row.entrantCount,
    tickets: row.ticketCount,
  })
  return id
}
