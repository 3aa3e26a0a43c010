import { sql } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { notFound } from '#server/commands/command-error.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'

/** Tries a job that was given up again. Every job is safe to run twice. */
export async function retryJob(
  services: Services,
  actor: CommandActor,
  input: { readonly job: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { rows } = await tx.db.execute<{ name: string }>(sql`
      update pgboss.job set state = 'retry', retry_limit = greatest(retry_limit, retry_count + 1), completed_on = null,
        start_after = now()
      where id = ${input.job} and state = 'failed' returning name`)
    const [job] = rows
    if (!job) throw notFound('failed job')
    await audit(tx, services, actor, {
      action: 'job.retry',
      organisationId: null,
      subjectId: input.job,
      sentence: `Had a job tried again: ${job.name}.`,
    })
  })
}
