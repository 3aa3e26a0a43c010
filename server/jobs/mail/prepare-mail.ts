import { sql } from 'drizzle-orm'
import { mailDomain } from '#server/commands/account-mail.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { AfterWrite } from '#server/jobs/crash-points.ts'
import type { Services } from '#server/services.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import type { JobData } from '#server/store/queues.ts'

/**
 * Writes one row for each mail of a draw: to everybody with an address. Keys are unique, so a second run adds nothing. The
 * Message-ID follows from the key exactly as `messageIdFor` makes it.
 */
export async function prepareMail(
  services: Services,
  afterWrite: AfterWrite,
  input: JobData['prepare-mail'],
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const now = sql`${services.clock.now().toISOString()}::timestamptz`
    const messageId = sql`'<' || left(encode(sha256(convert_to('["' || k.key || '"]', 'UTF8')), 'hex'), 40) || ${`@${mailDomain(services)}>`}::text`
    if (input.about === 'notice') {
      const index = sql`${input.logIndex ?? -1}::bigint`
      await tx.db.execute(sql`
        insert into mail (key, kind, draw_id, entrant_id, log_index, message_id, created_at, next_attempt_at)
        select k.key, k.kind, ${input.draw}::uuid, k.entrant_id, ${index}, ${messageId}, ${now}, ${now}
        from (select e.event || ':' || e.index || ':' || p.entrant_id as key, e.event as kind, p.entrant_id
          from log_event e, entrant_person p
          where e.index = ${index} and e.event in ('postponed', 'cancelled', 'failed')
            and p.draw_id = ${input.draw}::uuid and p.email is not null) k
        on conflict (key) do nothing`)
    } else if (input.about === 'entry') {
      const brought = input.import === undefined ? sql`` : sql`and e.import_id = ${input.import}::uuid`
      await tx.db.execute(sql`
        insert into mail (key, kind, draw_id, entrant_id, message_id, created_at, next_attempt_at)
        select k.key, 'entry', ${input.draw}::uuid, k.entrant_id, ${messageId}, ${now}, ${now}
        from (select 'entry:' || p.entrant_id as key, p.entrant_id
          from entrant_person p join entrant e on e.id = p.entrant_id
          where p.draw_id = ${input.draw}::uuid and p.email is not null ${brought}
          order by p.entrant_id) k
        on conflict (key) do nothing`)
    } else {
      const seal = sealInForce(await sealsOf(tx.db, input.draw))
      if (!seal) return
      const winners = sql`exists (select from result_pick w where w.draw_id = ${input.draw}::uuid and w.leaf = p.leaf and w.prize is not null)`
      const kind = input.about === 'seal' ? sql`'seal'` : sql`case when ${winners} then 'won' else 'result' end`
      await tx.db.execute(sql`
        insert into mail (key, kind, draw_id, seal_id, leaf, entrant_id, message_id, created_at, next_attempt_at)
        select k.key, k.kind, ${input.draw}::uuid, ${seal.id}, k.leaf, k.entrant_id, ${messageId}, ${now}, ${now}
        from (select ${`${input.about}:${seal.digest}:`}::text || p.leaf as key, ${kind} as kind, p.leaf, p.entrant_id
          from sealed_leaf_person p where p.seal_id = ${seal.id} and p.email is not null
          order by p.leaf) k
        on conflict (key) do nothing`)
    }
    await services.queue.enqueue(tx.client, 'send-mail', { draw: input.draw })
  })
  afterWrite('mails-prepared')
}
