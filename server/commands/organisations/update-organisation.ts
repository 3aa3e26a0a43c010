import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { organisation } from '#server/store/schema/people.ts'
import { checkTimeZone, type OrganisationInput } from './create-organisation.ts'
import { lockOrganisation } from './lock-organisation.ts'

/** Renames or corrects an organisation. Its address on the site stays, and so do its sealed draws. */
export async function updateOrganisation(
  services: Services,
  actor: CommandActor,
  input: { readonly organisation: string; readonly version: number; readonly values: OrganisationInput },
): Promise<void> {
  checkTimeZone(input.values.timeZone)
  await inTransaction(services, async (tx) => {
    const row = await lockOrganisation(tx, input)
    await tx.db
      .update(organisation)
      .set({ ...input.values, version: row.version + 1 })
      .where(eq(organisation.id, row.id))
    const { name, registration, address, about, timeZone, currency } = row
    await audit(tx, services, actor, {
      action: 'organisation.update',
      organisationId: row.id,
      sentence: `Changed the organisation ${input.values.name}.`,
      before: { name, registration, address, about, timeZone, currency },
      after: input.values,
    })
  })
}
