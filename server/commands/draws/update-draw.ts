import { and, eq, ne } from 'drizzle-orm'
import type { DrawInput } from '#shared/schemas/api/office.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'
import { drawValues } from './draw-values.ts'
import { lockDraw, requireState } from './lock-draw.ts'

/** Changes a draft. Once a draw is open its terms are public: dates then move by postponing. */
export async function updateDraw(
  services: Services,
  actor: CommandActor,
  input: { readonly draw: string; readonly version: number; readonly values: DrawInput },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const locked = await lockDraw(tx, input)
    const { row } = locked
    requireState(row, ['draft'], 'change its details')
    const values = drawValues(input.values, locked.organisation.timeZone)
    const slug = input.values.slug ?? row.slug
    if (slug !== row.slug) {
      const [taken] = await tx.db
        .select({ id: draw.id })
        .from(draw)
        .where(and(eq(draw.slug, slug), ne(draw.id, row.id)))
      if (taken) throw invalid('slug', 'Another draw has this address. Choose another one.')
    }
    await tx.db
      .update(draw)
      .set({ ...values, slug, version: row.version + 1 })
      .where(eq(draw.id, row.id))
    await audit(tx, services, actor, {
      action: 'draw.update',
      organisationId: row.organisationId,
      drawId: row.id,
      sentence: 'Changed the draft.',
      before: changedOnly(row, { ...values, slug }),
      after: changedOnly({ ...values, slug }, row),
    })
  })
}

/** The members of `left` that differ from those of `right`. */
function changedOnly(left: Record<string, unknown>, right: Record<string, unknown>): Record<string, unknown> {
  const shared = Object.keys(left).filter((key) => key in right)
  return Object.fromEntries(
    shared.filter((key) => JSON.stringify(left[key]) !== JSON.stringify(right[key])).map((key) => [key, left[key]]),
  )
}
