import { eq } from 'drizzle-orm'
import type { DrawInput } from '#shared/schemas/api/office.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid, notFound } from '#server/commands/command-error.ts'
import { freeSlug } from '#server/commands/free-slug.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { drawValues, slugFrom } from './draw-values.ts'

/** Makes a draft in an organisation, named by its slug. */
export async function createDraw(
  services: Services,
  actor: CommandActor,
  input: { readonly organisation: string; readonly draw: DrawInput },
): Promise<{ readonly id: string; readonly slug: string }> {
  return inTransaction(services, async (tx) => {
    const [owner] = await tx.db.select().from(organisation).where(eq(organisation.slug, input.organisation))
    if (!owner) throw notFound('organisation')
    const values = drawValues(input.draw, owner.timeZone)
    const slug = await freeSlug(tx, 'draw', input.draw.slug ?? slugFrom(input.draw.title))
    if (input.draw.slug !== undefined && slug !== input.draw.slug) {
      throw invalid('slug', 'Another draw has this address. Choose another one.')
    }
    const [row] = await tx.db
      .insert(draw)
      .values({ ...values, slug, organisationId: owner.id, createdAt: services.clock.now() })
      .returning({ id: draw.id })
    if (!row) throw new Error('The draw was not written.')
    await audit(tx, services, actor, {
      action: 'draw.create',
      organisationId: owner.id,
      drawId: row.id,
      sentence: `Made the draft “${values.title}”.`,
      after: { ...input.draw, slug },
    })
    return { id: row.id, slug }
  })
}
