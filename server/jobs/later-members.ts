import { and, eq, inArray } from 'drizzle-orm'
import type { ReplacedMember } from '#shared/archive/members.ts'
import { withCosignatures } from '#shared/log/add-checkpoint.ts'
import { logProofBytes } from '#shared/log/log-proof.ts'
import { replacedBytes } from '#shared/protocol/replaced.ts'
import { putCheckpoint } from '#server/commands/put-checkpoint.ts'
import type { Services } from '#server/services.ts'
import { cosignatureLines, witnessedSize } from '#server/store/queries/cosignatures.ts'
import { signedHead } from '#server/store/queries/log-head.ts'
import { provenEntriesOf, storedCheckpoint } from '#server/store/queries/log-tree.ts'
import { type SealRow, sealsOf } from '#server/store/queries/seals.ts'
import { logEvent } from '#server/store/schema/record.ts'

/** The members of a proof archive that tell of time: the log, its witnesses, the timestamp, the seals that were replaced. */
export async function laterMembers(
  services: Services,
  drawId: string,
  settled: { readonly result: { readonly digest: string }; readonly seal: SealRow },
) {
  return {
    ...(await logMembers(services, drawId, settled.result.digest)),
    ...(await witnessedMembers(services, drawId, settled.seal)),
    ...(await timeMembers(services, drawId, settled.seal)),
  }
}

/**
 * The head of the log and what it says of the draw. The head is the oldest one kept with the result's entry, so that a
 * second run makes the same members; it is signed with all keys, so with that of the seal, which may be retired by now.
 */
async function logMembers(services: Services, drawId: string, resultDigest: string) {
  const { db, sha256 } = services
  const [drawn] = await db
    .select({ index: logEvent.index })
    .from(logEvent)
    .where(and(eq(logEvent.drawId, drawId), eq(logEvent.event, 'drawn'), eq(logEvent.digest, resultDigest)))
  if (!drawn) throw new Error('The log does not have the result of this draw.')
  if ((await storedCheckpoint(db, drawn.index)) === null) await putCheckpoint(services)
  const kept = await storedCheckpoint(db, drawn.index)
  if (!kept) throw new Error('There is no checkpoint with the result of this draw.')
  const { note } = await signedHead(db, services, { size: kept.size })
  const entries = await provenEntriesOf(db, sha256, drawId, kept.size)
  const cosigned = withCosignatures(note, await cosignatureLines(db, kept.size))
  return { 'checkpoint.txt': cosigned, 'log-proof.json': logProofBytes(entries) }
}

/** A head of the log from before the draw that witnesses cosigned with this seal's entry in it, where there is one. */
async function witnessedMembers(services: Services, drawId: string, own: SealRow) {
  const { db, sha256 } = services
  const [logged] = await db
    .select({ index: logEvent.index })
    .from(logEvent)
    .where(
      and(
        eq(logEvent.drawId, drawId),
        inArray(logEvent.event, ['sealed', 'replaced']),
        eq(logEvent.digest, own.digest),
      ),
    )
  const size = logged ? await witnessedSize(db, logged.index, own.drawAt) : null
  if (!logged || size === null) return {}
  const { note } = await signedHead(db, services, { size })
  const entries = await provenEntriesOf(db, sha256, drawId, size)
  return {
    'witnessed.txt': withCosignatures(note, await cosignatureLines(db, size)),
    'witnessed-proof.json': logProofBytes(entries.filter(({ index }) => index === logged.index)),
  }
}

/** The seal's timestamp, and the seals that it and those before it replaced. */
async function timeMembers(services: Services, drawId: string, own: SealRow) {
  const members: Partial<Record<'seal.tsr' | 'replaced.json' | ReplacedMember, Uint8Array>> = {}
  if (own.timestamp) members['seal.tsr'] = own.timestamp
  const chain = chainTo(await sealsOf(services.db, drawId), own)
  for (const [i, old] of chain.slice(0, -1).entries()) {
    members[`replaced-${i + 1}.json`] = old.bytes
    members[`replaced-${i + 1}.sig`] = old.signature
    if (old.timestamp) members[`replaced-${i + 1}.tsr`] = old.timestamp
  }
  if (chain.length > 1) {
    members['replaced.json'] = replacedBytes(
      chain.slice(0, -1).map(({ digest }, i) => {
        const { added, changed, removed } = chain[i + 1] as SealRow
        return { added: added ?? 0, changed: changed ?? 0, removed: removed ?? 0, seal: digest }
      }),
    )
  }
  return members
}

/** A seal and all before it, each replaced by the next. */
function chainTo(seals: readonly SealRow[], own: SealRow): SealRow[] {
  const chain = [own]
  for (let first = own; first.supersedes !== null; first = chain[0] as SealRow) {
    const before = seals.find(({ digest }) => digest === first.supersedes)
    if (!before) throw new Error('A seal that was replaced is missing.')
    chain.unshift(before)
  }
  return chain
}
