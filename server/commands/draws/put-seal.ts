import { and, inArray, isNotNull } from 'drizzle-orm'
import { toHex } from '#shared/bytes/hex.ts'
import { formatTime } from '#shared/bytes/time.ts'
import { FORMAT, MIN_SEAL_LEAD } from '#shared/protocol/limits.ts'
import { beaconFor, roundTime } from '#shared/protocol/networks.ts'
import { sealBytes, seedCommitment, termsDigest, validateSeal } from '#shared/protocol/seal.ts'
import type { CommandActor } from '#server/commands/actor.ts'
import { refused } from '#server/commands/command-error.ts'
import { copyRows } from '#server/commands/copy-rows.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { prizeRowsOf } from '#server/store/queries/office-draws.ts'
import type { SealRow } from '#server/store/queries/seals.ts'
import { sealing, sealSecret } from '#server/store/schema/seal.ts'
import { instantOf, secondsOf, wholeSecond } from '#server/time/instants.ts'
import { type CommittedList, commitList } from './commit-list.ts'
import type { LockedDraw } from './lock-draw.ts'

export interface PutSealInput {
  readonly drawAt: Date
  /** The seal that this one replaces, and the public reason. */
  readonly replaces: { readonly seal: SealRow; readonly reason: string } | null
}

/** What binds a secret of a seal to it, as associated data of its encryption. */
export const seedContext = (sealDigest: string): string => `seal-seed:${sealDigest}`
export const blindingKeyContext = (sealDigest: string): string => `seal-blinding-key:${sealDigest}`

/** The worker leaves a new seal to whoever made it for so long, in milliseconds: they ask for its timestamp at once. */
const HEAD_START = 3000

/**
 * Makes, signs and stores a seal over the list of a locked draw (PROTOCOL section 3). New seed, blinding key and references
 * every time. It does not count yet: `completeSealing` asks for its timestamp, at once or as the job enqueued here.
 */
export async function putSeal(
  tx: Transaction,
  services: Services,
  locked: LockedDraw,
  actor: CommandActor,
  input: PutSealInput,
): Promise<void> {
  const { row, organisation } = locked
  const seed = services.entropy.bytes(32)
  const blindingKey = services.entropy.bytes(32)
  const list = await commitList({ db: tx.db, entropy: services.entropy, sha256: services.sha256 }, row.id, blindingKey)
  const drawAt = secondsOf(input.drawAt)
  const sealedAt = wholeSecond(services.clock.now())
  if (drawAt - secondsOf(sealedAt) < MIN_SEAL_LEAD) {
    throw refused(`The draw time is less than ${MIN_SEAL_LEAD} seconds ahead. Postpone the draw, then seal it.`)
  }
  const key = services.signing.current
  const beacon = beaconFor(services.site.network, drawAt)
  const prizes = await prizeRowsOf(tx.db, row.id)
  const made = validateSeal(
    {
      format: FORMAT,
      kind: 'seal',
      draw: row.slug,
      organisation: { name: organisation.name, registration: organisation.registration },
      title: row.title,
      key: key.fingerprint,
      terms: toHex(termsDigest(services.sha256, row.terms)),
      sealedAt: instantOf(sealedAt),
      drawAt: formatTime(drawAt),
      revealBy: null,
      entries: { count: list.leaves.length, root: toHex(list.root), tickets: list.tickets },
      prizes: prizes.map(({ code, name, quantity }) => ({ id: code, name, quantity })),
      reserves: row.reserves,
      rule: row.rule,
      sources: { beacon, flips: 'derived', seedCommit: toHex(seedCommitment(services.sha256, seed)), tosses: null },
      supersedes: input.replaces?.seal.digest ?? null,
      reason: input.replaces?.reason ?? null,
    },
    { allowDevelopmentChain: services.site.developmentChain },
  )
  if (!made.ok) throw refused(`The draw cannot be sealed: ${made.error.message}`)
  const bytes = sealBytes(made.value)
  const digest = toHex(services.sha256(bytes))
  const roundAt = new Date(roundTime(beacon, beacon.round) * 1000)
  const [stored] = await tx.db
    .insert(sealing)
    .values({
      drawId: row.id,
      digest,
      bytes,
      signature: key.sign(bytes),
      terms: row.terms,
      keyFingerprint: key.fingerprint,
      root: toHex(list.root),
      entrants: list.leaves.length,
      tickets: list.tickets,
      seedCommit: made.value.sources.seedCommit,
      beaconChain: beacon.chain,
      beaconRound: beacon.round,
      beaconRoundAt: roundAt,
      sealedAt,
      drawAt: input.drawAt,
      supersedes: made.value.supersedes,
      reason: made.value.reason,
      actorId: actor?.id ?? null,
      drawVersion: row.version,
      madeAt: services.clock.now(),
      ...(input.replaces ? await changesSince(tx, input.replaces.seal.id, row.id) : {}),
    })
    .returning({ id: sealing.id })
  if (!stored) throw new Error('The seal was not written.')
  await tx.db.insert(sealSecret).values({
    sealId: stored.id,
    seed: services.secrets.seal(seed, seedContext(digest)),
    blindingKey: services.secrets.seal(blindingKey, blindingKeyContext(digest)),
  })
  await storeLeaves(tx, stored.id, list)
  const startAfter = new Date(services.clock.now().getTime() + HEAD_START)
  await services.queue.enqueue(tx.client, 'timestamp', { draw: row.id }, { startAfter })
}

/** How the list differs from the one under an earlier seal: entrants are known by their rows, which keep their ids. */
async function changesSince(
  tx: Transaction,
  sealId: number,
  drawId: string,
): Promise<{ readonly added: number; readonly removed: number; readonly changed: number }> {
  const { rows } = await tx.client.query<{ added: number; removed: number; changed: number }>(
    `select count(*) filter (where old.entrant_id is null)::int as added,
       count(*) filter (where now.id is null)::int as removed,
       count(*) filter (where old.entrant_id is not null and now.id is not null
         and (old.tickets, old.label, old.name, old.contact, old.numbers)
           is distinct from (now.tickets, now.label, now.name, now.contact, now.numbers))::int as changed
     from (select p.entrant_id, l.tickets, p.label, p.name, p.contact, p.numbers
       from sealed_leaf_person p join sealed_leaf l using (seal_id, leaf) where p.seal_id = $1) as old
     full join (select e.id, e.tickets, p.label, p.name, concat_ws(', ', p.email, p.phone) as contact,
         coalesce(p.numbers, '') as numbers
       from entrant e left join entrant_person p on p.entrant_id = e.id where e.draw_id = $2) as now
       on now.id = old.entrant_id`,
    [sealId, drawId],
  )
  return rows[0] ?? { added: 0, removed: 0, changed: 0 }
}

/** Destroys the seeds of seals that will never be opened, and drops their mails that still wait. */
export async function retire(
  tx: Transaction,
  services: Pick<Services, 'clock'>,
  sealIds: readonly number[],
): Promise<void> {
  if (sealIds.length === 0) return
  await tx.db
    .update(sealSecret)
    .set({ seed: null, seedErasedAt: services.clock.now() })
    .where(and(inArray(sealSecret.sealId, [...sealIds]), isNotNull(sealSecret.seed)))
  await tx.client.query(`update mail set state = 'dropped' where seal_id = any($1::bigint[]) and state = 'queued'`, [
    sealIds,
  ])
}

async function storeLeaves(tx: Transaction, sealId: number, list: CommittedList): Promise<void> {
  const { leaves } = list
  await copyRows(
    tx.client,
    'sealed_leaf',
    ['seal_id', 'leaf', 'tickets', 'entry_commit', 'label_commit', 'identity_commit'],
    map(leaves, (leaf, index) => [
      sealId,
      index,
      leaf.tickets,
      leaf.entryCommit,
      leaf.labelCommit,
      leaf.identityCommit,
    ]),
  )
  await copyRows(
    tx.client,
    'sealed_leaf_person',
    ['seal_id', 'leaf', 'entrant_id', 'reference', 'label', 'name', 'contact', 'numbers', 'email'],
    map(leaves, (leaf, index) => [
      sealId,
      index,
      leaf.entrantId,
      leaf.reference,
      leaf.label,
      leaf.name,
      leaf.contact,
      leaf.numbers,
      leaf.email,
    ]),
  )
}

function* map<T, U>(items: readonly T[], make: (item: T, index: number) => U): Generator<U> {
  for (const [index, item] of items.entries()) yield make(item, index)
}
