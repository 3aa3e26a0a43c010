import type { Services } from '#server/services.ts'
import { serviceCheck, workerHeartbeat } from '#server/store/schema/operation.ts'

/** Says that this worker is alive. */
export async function heartbeat(services: Services, id: string, startedAt: Date): Promise<void> {
  const seenAt = services.clock.now()
  await services.db
    .insert(workerHeartbeat)
    .values({ id, startedAt, seenAt })
    .onConflictDoUpdate({ target: workerHeartbeat.id, set: { seenAt } })
}

/** Looks at relays, timestamp authorities, mail server and object store, and notes what it finds for the administrator. */
export async function lookAround(services: Services): Promise<void> {
  const { site } = services
  const [relays, mail, store, authorities] = await Promise.all([
    services.beacon.check(site.network),
    services.mailer.check(),
    services.store.check(),
    services.timestamps.check(),
  ])
  const at = services.clock.now()
  const rows: (typeof serviceCheck.$inferInsert)[] = [
    ...relays.map(({ relay, ok, round, milliseconds, detail }) => ({
      service: 'relay' as const,
      address: relay,
      ok,
      round,
      milliseconds,
      detail,
      at,
    })),
    ...authorities.map(({ url, ok, milliseconds, detail }) => ({
      service: 'timestamp' as const,
      address: url,
      ok,
      milliseconds,
      detail,
      at,
    })),
    { service: 'mail', address: 'mail', ok: mail.ok, milliseconds: mail.milliseconds, detail: mail.detail, at },
    {
      service: 'store',
      address: site.bucket,
      ok: store.ok,
      milliseconds: store.milliseconds,
      locked: store.locks,
      detail: store.detail,
      at,
    },
  ]
  await services.db.transaction(async (tx) => {
    await tx.delete(serviceCheck)
    await tx.insert(serviceCheck).values(rows)
  })
}
