import { type Checkpoint, logOrigin, signCheckpoint } from '#shared/log/checkpoint.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { logRoot, logSize } from '#server/store/queries/log-tree.ts'

type Signing = Pick<Services, 'sha256' | 'signing' | 'site'>

/** A head of the log and the note that signs it: the same bytes each time. */
export interface SignedHead {
  readonly head: Checkpoint
  readonly note: string
}

/**
 * The log as it stands, or as it stood at a size, signed by all keys that the site holds, the current one first: whoever
 * knows a retired one can still compare. Throws a RangeError for a size that it does not have.
 */
export async function signedHead(
  db: Database,
  { sha256, signing, site }: Signing,
  options: { readonly size?: number } = {},
): Promise<SignedHead> {
  const size = options.size ?? (await logSize(db))
  const head = { origin: logOrigin(site.origin), size, root: await logRoot(db, sha256, size) }
  return { head, note: signCheckpoint(sha256, head, ...signing.all) }
}
