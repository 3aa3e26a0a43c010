import type { z } from 'zod'
import type { organisationInput } from '#shared/schemas/api/administrator.ts'
import { audit } from '#server/commands/audit.ts'
import { invalid } from '#server/commands/command-error.ts'
import { slugFrom } from '#server/commands/draws/draw-values.ts'
import { freeSlug } from '#server/commands/free-slug.ts'
import { invite } from '#server/commands/people/invite-person.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { organisation } from '#server/store/schema/people.ts'
import { isTimeZone } from '#server/time/local-time.ts'

export type OrganisationInput = z.output<typeof organisationInput>

/** Makes an organisation, which waits for approval, and invites its first promoter. */
export async function createOrganisation(
  services: Services,
  actor: { readonly id: string; readonly name: string },
  input: OrganisationInput & { readonly promoterEmail: string; readonly demo?: boolean },
): Promise<{ readonly id: string; readonly slug: string }> {
  const { promoterEmail, demo, ...values } = input
  checkTimeZone(values.timeZone)
  return inTransaction(services, async (tx) => {
    const slug = await freeSlug(tx, 'organisation', slugFrom(values.name))
    const [row] = await tx.db
      .insert(organisation)
      .values({ ...values, slug, demo: demo ?? false, createdAt: services.clock.now() })
      .returning()
    if (!row) throw new Error('The organisation was not written.')
    await audit(tx, services, actor, {
      action: 'organisation.create',
      organisationId: row.id,
      sentence: `Made the organisation ${row.name}.`,
      after: values,
    })
    await invite(tx, services, actor, row, { email: promoterEmail, role: 'promoter' })
    return { id: row.id, slug }
  })
}

export function checkTimeZone(timeZone: string): void {
  if (!isTimeZone(timeZone)) throw invalid('timeZone', 'Choose a time zone from the list, like Europe/London.')
}
