import { and, eq } from 'drizzle-orm'
import { hexBytes } from '#shared/bytes/hex.ts'
import { createSaltDeriver } from '#shared/protocol/commitments.ts'
import { makeReceipt, type Receipt } from '#shared/protocol/receipt.ts'
import { blindingKeyContext } from '#server/commands/draws/put-seal.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { sealedLeaf, sealedLeafPerson, sealSecret } from '#server/store/schema/seal.ts'
import { inclusionOf } from './leaf-proofs.ts'
import type { SealRow } from './seals.ts'

export interface SealedEntry {
  readonly person: typeof sealedLeafPerson.$inferSelect
  readonly tickets: number
}

/** An entrant as a seal has them; null where they are not in it, or were erased. */
export async function sealedEntryOf(db: Database, sealId: number, entrantId: number): Promise<SealedEntry | null> {
  const [row] = await db
    .select({ person: sealedLeafPerson, tickets: sealedLeaf.tickets })
    .from(sealedLeafPerson)
    .innerJoin(
      sealedLeaf,
      and(eq(sealedLeaf.sealId, sealedLeafPerson.sealId), eq(sealedLeaf.leaf, sealedLeafPerson.leaf)),
    )
    .where(and(eq(sealedLeafPerson.sealId, sealId), eq(sealedLeafPerson.entrantId, entrantId)))
  return row ?? null
}

/** The receipt of one entrant (PROTOCOL section 10); null once the seal's blinding key was destroyed. */
export async function receiptOf(
  services: Pick<Services, 'db' | 'sha256' | 'secrets'>,
  seal: SealRow,
  { person, tickets }: SealedEntry,
): Promise<Receipt | null> {
  const { db, sha256, secrets } = services
  const [secret] = await db
    .select({ blindingKey: sealSecret.blindingKey })
    .from(sealSecret)
    .where(eq(sealSecret.sealId, seal.id))
  if (!secret?.blindingKey) return null
  const proof = await inclusionOf({ db, sha256 }, { seal: seal.digest, leaf: person.leaf })
  if (!proof) return null
  const { leaf, label, contact, name, numbers, reference } = person
  const saltsOf = createSaltDeriver(sha256, secrets.open(secret.blindingKey, blindingKeyContext(seal.digest)))
  return makeReceipt({
    sealDigest: hexBytes(seal.digest, 32),
    leaf,
    tickets,
    label,
    identity: { contact, name, numbers, reference },
    path: proof.path.map(({ hash, side, tickets: held }) => ({ hash: hexBytes(hash, 32), side, tickets: held })),
    ...saltsOf(reference),
  })
}
