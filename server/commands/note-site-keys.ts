import { and, eq, isNull, min, ne } from 'drizzle-orm'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { siteKey } from '#server/store/schema/record.ts'
import { seal } from '#server/store/schema/seal.ts'

/**
 * Notes the site's keys, at every start: the one that signs from now on, and that another one ends. A key that is older than
 * these notes counts from its first seal.
 */
export async function noteSiteKeys(services: Services): Promise<void> {
  const { signing, clock } = services
  const now = clock.now()
  await inTransaction(services, async (tx) => {
    for (const key of signing.all) {
      const [first] = await tx.db
        .select({ at: min(seal.sealedAt) })
        .from(seal)
        .where(eq(seal.keyFingerprint, key.fingerprint))
      await tx.db
        .insert(siteKey)
        .values({
          fingerprint: key.fingerprint,
          publicKeyPem: key.publicKeyPem,
          since: first?.at ?? now,
          until: key === signing.current ? null : now,
        })
        .onConflictDoNothing()
    }
    // A key that came back signs again; all others have ended.
    await tx.db.update(siteKey).set({ until: null }).where(eq(siteKey.fingerprint, signing.current.fingerprint))
    await tx.db
      .update(siteKey)
      .set({ until: now })
      .where(and(isNull(siteKey.until), ne(siteKey.fingerprint, signing.current.fingerprint)))
  })
}
