import { Readable } from 'node:stream'
import { eq } from 'drizzle-orm'
import type { SettableClock } from '#server/adapters/clock/clock.ts'
import { closeDraw } from '#server/commands/draws/close-draw.ts'
import { createDraw } from '#server/commands/draws/create-draw.ts'
import { openDraw } from '#server/commands/draws/open-draw.ts'
import { putPrizes } from '#server/commands/draws/put-prizes.ts'
import { sealDraw, sealLongList } from '#server/commands/draws/seal-draw.ts'
import { SEAL_AT_ONCE } from '#server/commands/draws/sealing-job.ts'
import { applyImport } from '#server/commands/entrants/apply-import.ts'
import { uploadImport } from '#server/commands/entrants/upload-import.ts'
import { nameWitness } from '#server/commands/witnesses/name-witness.ts'
import { stateAsWitness } from '#server/commands/witnesses/state-as-witness.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { prepareMail } from '#server/jobs/mail/prepare-mail.ts'
import { sendMail } from '#server/jobs/mail/send-mail.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { storeArchive } from '#server/jobs/store-archive.ts'
import type { Services } from '#server/services.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { result } from '#server/store/schema/result.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import type { DrawInput, PrizeInput } from '#shared/schemas/api/office.ts'
import { type DemoList, demoCsv } from './demo-entrants.ts'
import type { DemoOffice } from './demo-people.ts'

export interface DemoDraw {
  readonly slug: string
  readonly title: string
  readonly goodCause: string
  readonly terms: string
  readonly prizes: readonly (readonly [name: string, quantity: number, donor?: string])[]
  readonly rule: DrawInput['rule']
  readonly reserves: number
  readonly ticketPriceMinor: number
  readonly closesAt: Date
  readonly drawAt: Date
  readonly list: DemoList
}

/** The steps of a draw's life, each by the office's own command, at the time of the clock. */
export class DemoSteps {
  constructor(
    readonly services: Services,
    readonly clock: SettableClock,
    private readonly office: DemoOffice,
    private readonly currency: string,
  ) {}

  async exists(slug: string): Promise<boolean> {
    const rows = await this.services.db.select({ id: draw.id }).from(draw).where(eq(draw.slug, slug))
    return rows.length > 0
  }

  async draft(plan: DemoDraw): Promise<string> {
    const { services, office } = this
    const { id } = await createDraw(services, office.organiser, {
      organisation: office.slug,
      draw: {
        title: plan.title,
        slug: plan.slug,
        goodCause: plan.goodCause,
        promoterName: office.promoter.name,
        promoterAddress: office.address,
        licence: null,
        ticketPrice: { minor: plan.ticketPriceMinor, currency: this.currency },
        minimumAge: 16,
        terms: plan.terms,
        closesAt: localFromInstant(plan.closesAt, office.timeZone),
        drawAt: localFromInstant(plan.drawAt, office.timeZone),
        rule: plan.rule,
        reserves: plan.reserves,
      },
    })
    const prizes = plan.prizes.map(
      ([name, quantity, donor]): PrizeInput => ({
        name,
        quantity,
        donor: donor ?? null,
        description: null,
        value: null,
      }),
    )
    await putPrizes(services, office.organiser, { draw: id, version: await this.version(id), prizes })
    return id
  }

  /** Opens for entries, and brings in the list that an organiser has. */
  async open(id: string, list: DemoList): Promise<void> {
    await openDraw(this.services, this.office.promoter, { draw: id, version: await this.version(id) })
    await this.import(id, list)
  }

  async close(id: string): Promise<void> {
    await closeDraw(this.services, this.office.promoter, { draw: id, version: await this.version(id) })
  }

  /** Seals at once, however long the list: the worker does not run yet. Sends the receipts. */
  async seal(id: string): Promise<void> {
    const row = await this.row(id)
    const input = { draw: id, version: row.version, entrants: row.entrantCount, tickets: row.ticketCount }
    if (row.entrantCount > SEAL_AT_ONCE) await sealLongList(this.services, { ...input, actor: this.office.promoter.id })
    else await sealDraw(this.services, this.office.promoter, input)
    await this.mail(id, 'seal')
  }

  async witness(id: string): Promise<void> {
    await nameWitness(this.services, this.office.promoter, {
      draw: id,
      name: this.office.witness.name,
      role: 'Neighbour, asked as a witness',
      connection: 'none; holds no ticket and is no member.',
      person: this.office.witness.id,
    })
  }

  async confirm(id: string, about: 'seal' | 'result'): Promise<void> {
    const inForce = sealInForce(await sealsOf(this.services.db, id))
    const [settled] = await this.services.db.select().from(result).where(eq(result.drawId, id))
    const digest = about === 'seal' ? inForce?.digest : settled?.digest
    if (digest === undefined) return
    const words = about === 'seal' ? 'I compared twenty counterfoils with the list.' : null
    await stateAsWitness(this.services, this.office.witness, { draw: id, about, digest, verdict: 'confirmed', words })
  }

  /** Moves the clock behind the draw time, and does what the worker does. */
  async settle(id: string): Promise<void> {
    const row = await this.row(id)
    this.clock.set(new Date(row.drawAt.getTime() + 4000))
    const outcome = await settleDraw(this.services, goOn, { draw: id })
    if (outcome.kind !== 'drawn') throw new Error(`The demo draw ${row.slug} could not be settled: ${outcome.kind}.`)
    await storeArchive(this.services, goOn, { draw: id })
    this.clock.advance(20_000)
    await this.mail(id, 'result')
  }

  async version(id: string): Promise<number> {
    return (await this.row(id)).version
  }

  private async mail(id: string, about: 'entry' | 'seal' | 'result'): Promise<void> {
    await prepareMail(this.services, goOn, { draw: id, about })
    await sendMail(this.services, goOn)
  }

  private async row(id: string): Promise<typeof draw.$inferSelect> {
    const [row] = await this.services.db.select().from(draw).where(eq(draw.id, id))
    if (!row) throw new Error('A demo draw is missing.')
    return row
  }

  private async import(id: string, list: DemoList): Promise<void> {
    const bytes = Buffer.from(demoCsv(list))
    const { id: imported } = await uploadImport(this.services, this.office.organiser, {
      draw: id,
      fileName: `${list.seed}.csv`,
      bytesTotal: bytes.length,
      stream: Readable.from([bytes]),
    })
    await applyImport(this.services, this.office.organiser, { draw: id, import: imported })
    await this.mail(id, 'entry')
  }
}
