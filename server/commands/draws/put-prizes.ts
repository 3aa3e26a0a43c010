import { eq } from 'drizzle-orm'
import { MAX_PICKS } from '#shared/protocol/limits.ts'
import type { PrizeInput } from '#shared/schemas/api/office.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError, invalid } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw, prize } from '#server/store/schema/draw.ts'
import { lockDraw, requireState } from './lock-draw.ts'

/**
 * Sets the prizes, in the order in which they are drawn. A prize keeps its code for as long as it is named; the code of
 * one that was taken away is not given again.
 */
export async function putPrizes(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly version: number; readonly prizes: readonly PrizeInput[] },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row } = await lockDraw(tx, input)
    requireState(row, ['draft'], 'change its prizes')
    const before = await tx.db.select().from(prize).where(eq(prize.drawId, row.id))
    const known = new Set(before.map(({ code }) => code))
    checkPrizes(input.prizes, known, row.reserves)
    let last = Math.max(0, ...before.map(({ code }) => Number(code.slice(1))))
    await tx.db.delete(prize).where(eq(prize.drawId, row.id))
    const rows = input.prizes.map((given, index) => ({
      drawId: row.id,
      code: given.id ?? `p${(last += 1)}`,
      position: index + 1,
      name: given.name,
      quantity: given.quantity,
      donor: given.donor,
      description: given.description,
      valueMinor: given.value?.minor ?? null,
      valueCurrency: given.value?.currency ?? null,
    }))
    if (rows.length > 0) await tx.db.insert(prize).values(rows)
    await tx.db
      .update(draw)
      .set({ version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await audit(tx, services, actor, {
      action: 'draw.prizes',
      organisationId: row.organisationId,
      drawId: row.id,
      sentence: `Set the prizes: ${rows.length === 0 ? 'none' : rows.map(({ name, quantity }) => (quantity === 1 ? name : `${quantity} × ${name}`)).join(', ')}.`,
      before: before.map(({ code, name, quantity }) => ({ code, name, quantity })),
      after: rows.map(({ code, name, quantity }) => ({ code, name, quantity })),
    })
  })
}

function checkPrizes(prizes: readonly PrizeInput[], known: ReadonlySet<string>, reserves: number): void {
  const seen = new Set<string>()
  let items = reserves
  for (const [index, { id, quantity }] of prizes.entries()) {
    items += quantity
    if (id === undefined) continue
    if (seen.has(id)) throw invalid(`prizes/${index}/id`, 'This prize stands in the table twice. Take it out once.')
    if (!known.has(id)) {
      throw new CommandError(
        'changed',
        'A prize in this table is no longer there. Load the page again and repeat your change.',
      )
    }
    seen.add(id)
  }
  if (items > MAX_PICKS) {
    throw invalid(
      'prizes',
      'Prizes and reserves together are more than 100,000. Lower a quantity or the number of reserves.',
    )
  }
}
