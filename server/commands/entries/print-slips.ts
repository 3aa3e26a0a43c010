import { and, asc, eq, gt, isNull } from 'drizzle-orm'
import { slipCodeFromEntropy } from '#shared/entrants/slip-code.ts'
import { SLIPS_AT_ONCE } from '#shared/schemas/api/entry.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { lockDraw, requireState } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import { entryCode } from '#server/store/schema/entry.ts'

const PUBLISHED = ['open', 'closed', 'sealed', 'drawn', 'concluded', 'cancelled', 'failed'] as const

export interface PrintSlipsInput {
  readonly draw: string
  /** Those without an e-mail address, everybody, or one entrant. */
  readonly who: 'without-email' | 'everybody' | { readonly entrant: number }
  /** The last entrant of the batch before; null for the first. */
  readonly after: number | null
}

export interface Slip {
  readonly entrant: string
  readonly name: string
  readonly tickets: number
  readonly numbers: string | null
  readonly code: string
}

/** Makes a new code for each entrant of a batch. Codes of slips printed earlier go on working. */
export async function printSlips(
  services: Services,
  actor: CommandActor,
  input: PrintSlipsInput,
): Promise<{ readonly slips: readonly Slip[]; readonly more: boolean }> {
  return inTransaction(services, async (tx) => {
    const { row: its } = await lockDraw(tx, { draw: input.draw })
    requireState(its, PUBLISHED, 'print slips')
    const { who } = input
    const chosen =
      who === 'everybody'
        ? undefined
        : who === 'without-email'
          ? isNull(entrantPerson.email)
          : eq(entrantPerson.entrantId, who.entrant)
    const rows = await tx.db
      .select({
        id: entrantPerson.entrantId,
        name: entrantPerson.name,
        tickets: entrant.tickets,
        numbers: entrantPerson.numbers,
      })
      .from(entrantPerson)
      .innerJoin(entrant, eq(entrant.id, entrantPerson.entrantId))
      .where(and(eq(entrantPerson.drawId, its.id), gt(entrantPerson.entrantId, input.after ?? 0), chosen))
      .orderBy(asc(entrantPerson.entrantId))
      .limit(SLIPS_AT_ONCE + 1)
    const more = rows.length > SLIPS_AT_ONCE
    const slips = rows.slice(0, SLIPS_AT_ONCE).map(({ id, ...row }) => ({
      ...row,
      entrant: String(id),
      code: slipCodeFromEntropy(services.entropy.bytes(12)),
    }))
    if (slips.length === 0) return { slips, more }
    const createdAt = services.clock.now()
    await tx.db.insert(entryCode).values(
      slips.map(({ entrant: id, code }) => ({
        codeHash: services.slipCodes.of(code),
        entrantId: Number(id),
        createdAt,
      })),
    )
    await audit(tx, services, actor, {
      action: 'entrant.print-slips',
      organisationId: its.organisationId,
      drawId: its.id,
      sentence:
        slips.length === 1 ? 'Printed a slip with a new code.' : `Printed ${slips.length} slips with new codes.`,
    })
    return { slips, more }
  })
}
