import { sql } from 'drizzle-orm'
import { formatVkey } from '#shared/log/signed-note.ts'
import type { WitnessAddress } from '#shared/log/add-checkpoint.ts'
import { askWitness, type WitnessOutcome } from '#server/adapters/witness/ask-witness.ts'
import type { Services } from '#server/services.ts'
import { witnessState } from '#server/store/queries/cosignatures.ts'
import { signedHead } from '#server/store/queries/log-head.ts'
import { logConsistencyProof, storedCheckpoint } from '#server/store/queries/log-tree.ts'
import { logCosignature, logWitness } from '#server/store/schema/record.ts'

/** A witness that did not cosign is asked again after so long, in milliseconds. */
const AGAIN_MS = 30_000

/** Whether a configured witness has not cosigned the newest checkpoint, and it is time to ask it. */
export async function cosigningIsDue(services: Services): Promise<boolean> {
  return (await dueWitnesses(services)).length > 0
}

/**
 * Sends the newest checkpoint to the witnesses that have not cosigned it, and keeps their cosignatures. Nothing waits for
 * them; safe to run twice. Returns how many cosigned.
 */
export async function cosignCheckpoints(services: Services): Promise<number> {
  const due = await dueWitnesses(services)
  const outcomes = await Promise.all(due.map(({ witness, oldSize, size }) => ask(services, witness, oldSize, size)))
  return outcomes.filter(({ kind }) => kind === 'cosigned').length
}

interface Due {
  readonly witness: WitnessAddress
  readonly oldSize: number
  readonly size: number
}

async function dueWitnesses(services: Services): Promise<readonly Due[]> {
  const { db, site, clock } = services
  if (site.witnesses.length === 0) return []
  const newest = await storedCheckpoint(db)
  if (!newest) return []
  const due: Due[] = []
  for (const witness of site.witnesses) {
    const state = await witnessState(db, formatVkey(witness.key))
    const rested = state === null || state.ok || clock.now().getTime() - state.triedAt.getTime() >= AGAIN_MS
    if ((state?.size ?? 0) < newest.size && rested) due.push({ witness, oldSize: state?.size ?? 0, size: newest.size })
  }
  return due
}

async function ask(
  services: Services,
  witness: WitnessAddress,
  oldSize: number,
  size: number,
): Promise<WitnessOutcome> {
  const { db, sha256 } = services
  const { note } = await signedHead(db, services, { size })
  const proofFrom = (from: number) => logConsistencyProof(db, sha256, from, size)
  const outcome = await askWitness({ witness, note, size, oldSize, proofFrom })
  await record(services, witness, oldSize, size, outcome)
  return outcome
}

async function record(
  services: Services,
  { key }: WitnessAddress,
  oldSize: number,
  size: number,
  outcome: WitnessOutcome,
): Promise<void> {
  const witness = formatVkey(key)
  const ok = outcome.kind === 'cosigned'
  // A witness that is ahead of the site saw entries that this database does not have: it was wound back, or restored.
  const detail =
    outcome.kind === 'cosigned'
      ? `It cosigned the log at ${size} entries.`
      : outcome.kind === 'ahead'
        ? `It has cosigned ${outcome.size} entries of this log already, more than the ${size} that there are.`
        : outcome.detail
  const triedAt = services.clock.now()
  await services.db.transaction(async (tx) => {
    if (outcome.kind === 'cosigned') {
      const { line, at } = outcome
      await tx.insert(logCosignature).values({ size, witness, line, at }).onConflictDoNothing()
    }
    await tx
      .insert(logWitness)
      .values({ witness, size: ok ? size : oldSize, ok, detail: detail.slice(0, 1000), triedAt })
      .onConflictDoUpdate({
        target: logWitness.witness,
        set: {
          ok,
          detail: detail.slice(0, 1000),
          triedAt,
          size: sql`greatest(${logWitness.size}, excluded.size)`,
        },
      })
  })
}
