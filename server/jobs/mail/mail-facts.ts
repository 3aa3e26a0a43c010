import { and, asc, eq } from 'drizzle-orm'
import { hexBytes } from '#shared/bytes/hex.ts'
import { buildSumTree, type SumTree } from '#shared/merkle/sum-tree.ts'
import { createSaltDeriver } from '#shared/protocol/commitments.ts'
import { makeReceipt, receiptBytes } from '#shared/protocol/receipt.ts'
import { blindingKeyContext } from '#server/commands/draws/put-seal.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { presentAward } from '#server/store/queries/picks.ts'
import { readSealedLeaves } from '#server/store/queries/sealed-leaves.ts'
import { sealOf, type SealRow } from '#server/store/queries/seals.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import { correctionRequest } from '#server/store/schema/entry.ts'
import { organisation } from '#server/store/schema/people.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { resultPick } from '#server/store/schema/result.ts'
import { seal, sealedLeaf, sealedLeafPerson, sealSecret } from '#server/store/schema/seal.ts'
import type { DrawWords } from './compose.ts'

export interface PickedAward {
  readonly name: string
  readonly item: number
  readonly of: number
}

/** A seal with its tree, from which receipts are made: kept for as long as one run of sending takes. */
interface OpenSeal {
  readonly row: SealRow
  readonly tree: SumTree
  readonly saltsOf: ReturnType<typeof createSaltDeriver>
}

/** What mails to entrants tell, read when they are sent: nothing of it is stored a second time. */
export class MailFacts {
  private readonly seals = new Map<number, Promise<OpenSeal>>()

  constructor(
    private readonly services: Services,
    private readonly db: Database,
  ) {}

  async draw(drawId: string): Promise<DrawWords> {
    const [row] = await this.db
      .select({ draw, organisation: organisation.name })
      .from(draw)
      .innerJoin(organisation, eq(organisation.id, draw.organisationId))
      .where(eq(draw.id, drawId))
    if (!row) throw new Error('A mail tells of a draw that is not there.')
    return {
      title: row.draw.title,
      organisation: row.organisation,
      promoterName: row.draw.promoterName,
      promoterAddress: row.draw.promoterAddress,
      timeZone: row.draw.timeZone,
      drawAt: row.draw.drawAt,
      page: `${this.services.site.origin}/draws/${row.draw.slug}`,
      demo: row.draw.demo,
    }
  }

  /** The person behind a leaf, their code and tickets; null once they were erased. */
  async leaf(sealId: number, leaf: number) {
    const [row] = await this.db
      .select({ person: sealedLeafPerson, tickets: sealedLeaf.tickets, code: entrant.code })
      .from(sealedLeafPerson)
      .innerJoin(
        sealedLeaf,
        and(eq(sealedLeaf.sealId, sealedLeafPerson.sealId), eq(sealedLeaf.leaf, sealedLeafPerson.leaf)),
      )
      .innerJoin(entrant, eq(entrant.id, sealedLeafPerson.entrantId))
      .where(and(eq(sealedLeafPerson.sealId, sealId), eq(sealedLeafPerson.leaf, leaf)))
    return row ?? null
  }

  /** The prizes that a leaf won, in the order in which they were drawn. */
  async prizes(drawId: string, sealId: number, leaf: number): Promise<PickedAward[]> {
    const parsed = sealOf((await this.openSeal(sealId)).row)
    const rows = await this.db
      .select()
      .from(resultPick)
      .where(and(eq(resultPick.drawId, drawId), eq(resultPick.leaf, leaf)))
      .orderBy(asc(resultPick.pick))
    return rows.flatMap((row) => {
      const award = presentAward(parsed, row)
      return award.kind === 'prize' ? [{ name: award.name, item: award.item, of: award.of }] : []
    })
  }

  /** An entrant by their id, and the public reason of a log event; null once the person was erased. */
  async notice(entrantId: number, logIndex: number) {
    const [person] = await this.db.select().from(entrantPerson).where(eq(entrantPerson.entrantId, entrantId))
    if (!person) return null
    const [event] = await this.db
      .select({ reason: logNote.text })
      .from(logEvent)
      .leftJoin(logNote, eq(logNote.logIndex, logEvent.index))
      .where(eq(logEvent.index, logIndex))
    return { name: person.name, email: person.email, reason: event?.reason ?? null }
  }

  /** An entrant as the list has them now; null once the person was erased. */
  async entry(entrantId: number) {
    const [row] = await this.db
      .select({
        name: entrantPerson.name,
        email: entrantPerson.email,
        label: entrantPerson.label,
        numbers: entrantPerson.numbers,
        tickets: entrant.tickets,
        code: entrant.code,
      })
      .from(entrantPerson)
      .innerJoin(entrant, eq(entrant.id, entrantPerson.entrantId))
      .where(eq(entrantPerson.entrantId, entrantId))
    return row ?? null
  }

  /** A request for a correction and its answer; null while it waits, and once the person was erased. */
  async correction(id: number) {
    const [row] = await this.db.select().from(correctionRequest).where(eq(correctionRequest.id, id))
    if (!row || row.state === 'open' || row.answer === null) return null
    return { words: row.words, verdict: row.state, answer: row.answer }
  }

  /** The receipt of a leaf (PROTOCOL section 10), as bytes. */
  async receipt(sealId: number, person: typeof sealedLeafPerson.$inferSelect, tickets: number): Promise<Uint8Array> {
    const { row, tree, saltsOf } = await this.openSeal(sealId)
    const { contact, name, numbers, reference, label, leaf } = person
    return receiptBytes(
      makeReceipt({
        sealDigest: hexBytes(row.digest, 32),
        leaf,
        tickets,
        label,
        identity: { contact, name, numbers, reference },
        path: tree.path(leaf),
        ...saltsOf(reference),
      }),
    )
  }

  async sealRow(sealId: number): Promise<SealRow> {
    return (await this.openSeal(sealId)).row
  }

  private openSeal(sealId: number): Promise<OpenSeal> {
    const known = this.seals.get(sealId)
    if (known) return known
    // Two long lists at a time are enough to hold.
    if (this.seals.size >= 2) this.seals.clear()
    const opened = this.open(sealId)
    this.seals.set(sealId, opened)
    opened.catch(() => this.seals.delete(sealId))
    return opened
  }

  private async open(sealId: number): Promise<OpenSeal> {
    const { services } = this
    const [found] = await this.db
      .select({ row: seal, blindingKey: sealSecret.blindingKey })
      .from(seal)
      .innerJoin(sealSecret, eq(sealSecret.sealId, seal.id))
      .where(eq(seal.id, sealId))
    if (!found?.blindingKey) throw new Error('The blinding key of this seal is gone: no receipt can be made.')
    const { tickets, entryCommits } = await readSealedLeaves(this.db, found.row)
    return {
      row: found.row,
      tree: buildSumTree(services.sha256, tickets, entryCommits),
      saltsOf: createSaltDeriver(
        services.sha256,
        services.secrets.open(found.blindingKey, blindingKeyContext(found.row.digest)),
      ),
    }
  }
}
