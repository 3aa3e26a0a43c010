import { and, eq, sql } from 'drizzle-orm'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { createSaltDeriver } from '#shared/protocol/commitments.ts'
import { deriveDrawKey } from '#shared/protocol/draw-key.ts'
import { resultBytes } from '#shared/protocol/result.ts'
import { seedCommitment } from '#shared/protocol/seal.ts'
import { type SettledDraw, settleDraw as settle, winningLeaves } from '#shared/protocol/settle.ts'
import { transcriptLine as lineOf } from '#shared/protocol/transcript.ts'
import { audit } from '#server/commands/audit.ts'
import { copyRows } from '#server/commands/copy-rows.ts'
import { blindingKeyContext, seedContext } from '#server/commands/draws/put-seal.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { sealInForce, sealOf, type SealRow, sealsOf } from '#server/store/queries/seals.ts'
import { readSealedLeaves, type SealedLeaves } from '#server/store/queries/sealed-leaves.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { result, settling } from '#server/store/schema/result.ts'
import { sealedLeafPerson, sealSecret } from '#server/store/schema/seal.ts'
import { instantOf, wholeSecond } from '#server/time/instants.ts'
import type { AfterWrite } from './crash-points.ts'
import { fetchRound } from './fetch-round.ts'

export type Settling =
  | { readonly kind: 'drawn' }
  /** Not sealed any more: drawn, cancelled or failed already. */
  | { readonly kind: 'over' }
  /** Another worker has it in hand. */
  | { readonly kind: 'busy' }
  | { readonly kind: 'too-early'; readonly at: Date }
  | { readonly kind: 'no-round'; readonly since: Date; readonly roundAt: Date }

/**
 * Settles one draw: fetches and verifies the round that its seal names, opens the seed, makes every pick, and writes
 * result, transcript, labels, state, log and the jobs that follow in one transaction. Safe to run at any time, any number
 * of times, in several processes at once.
 */
export async function settleDraw(
  services: Services,
  afterWrite: AfterWrite,
  input: { readonly draw: string },
): Promise<Settling> {
  const { db, clock } = services
  const [row] = await db.select().from(draw).where(eq(draw.id, input.draw))
  const inForce = sealInForce(await sealsOf(db, input.draw))
  if (!row || row.state !== 'sealed' || !inForce?.beaconRoundAt) return { kind: 'over' }
  if (clock.now() < inForce.beaconRoundAt) return { kind: 'too-early', at: inForce.beaconRoundAt }
  const fetched = await fetchRound(services, row.id, inForce)
  if (fetched.kind === 'waiting') return { kind: 'no-round', since: fetched.since, roundAt: inForce.beaconRoundAt }
  afterWrite('round-noted')
  const outcome = await inTransaction(services, async (tx): Promise<'drawn' | 'over' | 'busy'> => {
    const [locked] = await tx.db.select().from(draw).where(eq(draw.id, row.id)).for('update', { skipLocked: true })
    if (!locked) return 'busy'
    const current = sealInForce(await sealsOf(tx.db, row.id))
    if (locked.state !== 'sealed' || current?.id !== inForce.id) return 'over'
    await write(tx, services, afterWrite, { row: locked, inForce, signature: fetched.signature })
    return 'drawn'
  })
  if (outcome === 'drawn') afterWrite('settling-committed')
  return { kind: outcome }
}

interface Ready {
  readonly row: typeof draw.$inferSelect
  readonly inForce: SealRow
  readonly signature: string
}

async function write(tx: Transaction, services: Services, afterWrite: AfterWrite, ready: Ready): Promise<void> {
  const { row, inForce } = ready
  const now = wholeSecond(services.clock.now())
  const secrets = await openSecrets(tx, services, inForce)
  const leaves = await readSealedLeaves(tx.db, inForce)
  const settled = pick(services, ready, secrets.seed, leaves, now)
  const bytes = resultBytes(settled.result)
  const digest = toHex(services.sha256(bytes))
  const key = services.signing.find(inForce.keyFingerprint)
  if (!key) {
    throw new Error(
      `The signing key ${inForce.keyFingerprint}, which the seal names, is not configured. Put it into EVENPENNY_RETIRED_SIGNING_KEYS.`,
    )
  }
  const randomness = services.sha256(hexBytes(ready.signature, 48))
  await tx.db.insert(result).values({
    drawId: row.id,
    sealId: inForce.id,
    digest,
    bytes,
    signature: key.sign(bytes),
    transcriptDigest: settled.result.transcript,
    drawnAt: now,
    drawKey: toHex(
      deriveDrawKey(services.sha256, {
        sealDigest: hexBytes(inForce.digest, 32),
        seed: secrets.seed,
        beaconRandomness: randomness,
        tossBits: null,
      }),
    ),
    seed: toHex(secrets.seed),
    beaconSignature: ready.signature,
    beaconRandomness: toHex(randomness),
    picks: settled.result.picks.length,
  })
  afterWrite('result-written')
  await writePicks(tx, row, settled, leaves)
  afterWrite('picks-written')
  await copyRows(
    tx.client,
    'transcript_line',
    ['draw_id', 'pick', 'line'],
    settled.outcome.picks.map((walk) => [row.id, walk.pick, lineOf(walk).trimEnd()]),
  )
  afterWrite('transcript-written')
  await openLabels(tx, services, row.id, inForce, secrets.blindingKey, settled)
  afterWrite('labels-opened')
  await tx.db.update(sealSecret).set({ seed: null, seedErasedAt: now }).where(eq(sealSecret.sealId, inForce.id))
  afterWrite('seed-erased')
  await tx.db
    .update(draw)
    .set({ state: 'drawn', drawnAt: now, endedAt: now, version: row.version + 1 })
    .where(eq(draw.id, row.id))
  await tx.db.update(settling).set({ done: true, triedAt: services.clock.now() }).where(eq(settling.drawId, row.id))
  afterWrite('state-drawn')
  await announce(tx, services, row, digest, settled)
  afterWrite('drawn-logged')
  await services.queue.enqueue(tx.client, 'archive', { draw: row.id })
  await services.queue.enqueue(tx.client, 'prepare-mail', { draw: row.id, about: 'result' })
  afterWrite('jobs-enqueued')
}

async function openSecrets(tx: Transaction, services: Services, inForce: SealRow) {
  const [stored] = await tx.db.select().from(sealSecret).where(eq(sealSecret.sealId, inForce.id))
  if (!stored?.seed || !stored.blindingKey) throw new Error('The secrets of the seal in force are gone.')
  const seed = services.secrets.open(stored.seed, seedContext(inForce.digest))
  if (toHex(seedCommitment(services.sha256, seed)) !== inForce.seedCommit) {
    throw new Error('The stored seed is not the one to which the seal is committed.')
  }
  return { seed, blindingKey: services.secrets.open(stored.blindingKey, blindingKeyContext(inForce.digest)) }
}

function pick(services: Services, ready: Ready, seed: Uint8Array, leaves: SealedLeaves, now: Date): SettledDraw {
  const seal = sealOf(ready.inForce)
  const round = seal.sources.beacon?.round
  if (round === undefined) throw new Error('The seal names no beacon.')
  const settled = settle(services.sha256, {
    seal,
    sealDigest: hexBytes(ready.inForce.digest, 32),
    tickets: leaves.tickets,
    reveal: { beacon: { round, signature: ready.signature }, seed: toHex(seed), tosses: null },
    drawnAt: instantOf(now),
    commitmentsOf: leaves.commitmentsOf,
  })
  if (settled === null) throw new Error('A derived draw never runs out of flips.')
  return settled
}

async function writePicks(
  tx: Transaction,
  row: typeof draw.$inferSelect,
  settled: SettledDraw,
  leaves: SealedLeaves,
): Promise<void> {
  const earlier = new Map<number, number>()
  await copyRows(
    tx.client,
    'result_pick',
    ['draw_id', 'pick', 'leaf', 'prize', 'item', 'reserve', 'tickets_in', 'remaining'],
    settled.outcome.picks.map(({ pick: number, leaf, award, remaining }) => {
      // Under every-ticket each pick takes one ticket out; under one-prize-each nobody is picked twice.
      const gone = earlier.get(leaf) ?? 0
      earlier.set(leaf, gone + 1)
      const ticketsIn = (leaves.tickets[leaf] ?? 0) - gone
      return 'reserve' in award
        ? [row.id, number, leaf, null, null, award.reserve, ticketsIn, remaining]
        : [row.id, number, leaf, award.prize, award.item, null, ticketsIn, remaining]
    }),
  )
}

/** Opens the labels of those who won a prize; somebody who was erased stays "label withheld". */
async function openLabels(
  tx: Transaction,
  services: Services,
  drawId: string,
  inForce: SealRow,
  blindingKey: Uint8Array,
  settled: SettledDraw,
): Promise<void> {
  const winners = winningLeaves(settled.result.picks)
  const firstPick = new Map<number, number>()
  for (const { leaf, pick: number } of settled.result.picks) if (!firstPick.has(leaf)) firstPick.set(leaf, number)
  const saltsOf = createSaltDeriver(services.sha256, blindingKey)
  const people = await tx.db
    .select({ leaf: sealedLeafPerson.leaf, label: sealedLeafPerson.label, reference: sealedLeafPerson.reference })
    .from(sealedLeafPerson)
    .where(and(eq(sealedLeafPerson.sealId, inForce.id), sql`${sealedLeafPerson.leaf} = any(${sql.param(winners)})`))
  await copyRows(
    tx.client,
    'opened_label',
    ['draw_id', 'leaf', 'first_pick', 'label', 'label_salt'],
    people.map(({ leaf, label, reference }) => [
      drawId,
      leaf,
      firstPick.get(leaf) ?? 0,
      label,
      toHex(saltsOf(reference).labelSalt),
    ]),
  )
}

async function announce(
  tx: Transaction,
  services: Services,
  row: typeof draw.$inferSelect,
  digest: string,
  settled: SettledDraw,
): Promise<void> {
  const [owner] = await tx.db.select().from(organisation).where(eq(organisation.id, row.organisationId))
  if (!owner) throw new Error('The draw has no organisation.')
  await audit(tx, services, null, {
    action: 'draw.settle',
    organisationId: row.organisationId,
    drawId: row.id,
    subjectId: digest,
    sentence: `The draw was drawn: ${settled.result.picks.length} picks, ${settled.outcome.flipsUsed} flips.`,
    after: { digest, picks: settled.result.picks.length },
  })
  await appendLog(tx, services, {
    event: 'drawn',
    organisation: { id: owner.id, slug: owner.slug },
    draw: { id: row.id, slug: row.slug },
    digest,
  })
}
