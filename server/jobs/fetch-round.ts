import { and, eq, sql } from 'drizzle-orm'
import type { Services } from '#server/services.ts'
import { sealOf, type SealRow } from '#server/store/queries/seals.ts'
import { beaconObservation, settling } from '#server/store/schema/result.ts'

export type Fetched =
  | { readonly kind: 'round'; readonly signature: string }
  | { readonly kind: 'waiting'; readonly since: Date }

/**
 * The round that a seal names, from the relays, verified under the network's key; noted once for good. Where there is none
 * yet, notes why, for the public page, and falls back to nothing.
 */
export async function fetchRound(services: Services, drawId: string, seal: SealRow): Promise<Fetched> {
  const { db } = services
  const { beacon } = sealOf(seal).sources
  if (beacon === null) throw new Error('The seal names no beacon.')
  const [known] = await db
    .select()
    .from(beaconObservation)
    .where(and(eq(beaconObservation.chain, beacon.chain), eq(beaconObservation.round, beacon.round)))
  if (known) {
    await note(services, drawId, 'settling', '')
    return { kind: 'round', signature: known.signature }
  }
  const answer = await services.beacon.read(beacon, beacon.round)
  if (answer.kind !== 'round') {
    const detail = answer.reasons.map((reason) => `${reason.relay}: ${reason.detail}`).join(' ')
    const since = await note(
      services,
      drawId,
      answer.kind === 'not-yet' ? 'beacon-not-yet' : 'beacon-unreachable',
      detail.slice(0, 1000),
    )
    return { kind: 'waiting', since }
  }
  await db
    .insert(beaconObservation)
    .values({
      chain: beacon.chain,
      round: beacon.round,
      signature: answer.round.signature,
      randomness: answer.round.randomness,
      relay: answer.round.relay,
      fetchedAt: services.clock.now(),
    })
    .onConflictDoNothing()
  await note(services, drawId, 'settling', '')
  return { kind: 'round', signature: answer.round.signature }
}

/** Notes what the settling waits for; `since` stays while that is the same. */
async function note(
  services: Services,
  drawId: string,
  waiting: (typeof settling.$inferInsert)['waiting'],
  detail: string,
): Promise<Date> {
  const now = services.clock.now()
  const [row] = await services.db
    .insert(settling)
    .values({ drawId, waiting, since: now, triedAt: now, detail })
    .onConflictDoUpdate({
      target: settling.drawId,
      set: {
        waiting,
        detail,
        triedAt: now,
        tries: sql`${settling.tries} + 1`,
        since: sql`case when ${settling.waiting} = ${waiting} then ${settling.since} else excluded.since end`,
      },
    })
    .returning({ since: settling.since })
  return row?.since ?? now
}
