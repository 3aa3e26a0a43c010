import { sql } from 'drizzle-orm'
import { toHex } from '#shared/bytes/hex.ts'
import { type LogEvent, logLeafBytes, noteDigest } from '#shared/protocol/log-leaf.ts'
import type { Services } from '#server/services.ts'
import { logEvent, logNote } from '#server/store/schema/record.ts'
import { instantOf, wholeSecond } from '#server/time/instants.ts'
import type { Transaction } from './transaction.ts'

export interface Logged {
  readonly event: LogEvent
  /** null: the site itself, in the entry of a checkpoint. */
  readonly organisation: { readonly id: string; readonly slug: string } | null
  readonly draw: { readonly id: string; readonly slug: string } | null
  /** Of the seal, the result or the checkpoint, hex. */
  readonly digest?: string
  readonly supersedes?: string
  /** A public reason. */
  readonly note?: string
}

/** Stands for the site where a leaf names an organisation: no organisation's address looks like it. */
const THE_SITE = '-'

/** Appends to the site's log (PROTOCOL section 13); a reason is hashed with a fresh salt and kept beside it. */
export async function appendLog(
  tx: Transaction,
  services: Pick<Services, 'clock' | 'entropy' | 'sha256'>,
  logged: Logged,
): Promise<number> {
  const at = wholeSecond(services.clock.now())
  const salt = logged.note === undefined ? null : services.entropy.bytes(32)
  const note = salt === null ? null : toHex(noteDigest(services.sha256, salt, logged.note ?? ''))
  const leaf = {
    at: instantOf(at),
    digest: logged.digest ?? null,
    draw: logged.draw?.slug ?? null,
    event: logged.event,
    format: 'evenpenny/1',
    kind: 'log',
    note,
    organisation: logged.organisation?.slug ?? THE_SITE,
    supersedes: logged.supersedes ?? null,
  } as const
  const [row] = await tx.db
    .insert(logEvent)
    .values({
      index: sql`log_next_index()`,
      at,
      event: leaf.event,
      drawId: logged.draw?.id ?? null,
      organisationId: logged.organisation?.id ?? null,
      draw: leaf.draw,
      organisation: leaf.organisation,
      digest: leaf.digest,
      supersedes: leaf.supersedes,
      note,
      leaf: logLeafBytes(leaf),
    })
    .returning({ index: logEvent.index })
  if (!row) throw new Error('The log event was not written.')
  if (salt !== null)
    await tx.db.insert(logNote).values({ logIndex: row.index, salt: toHex(salt), text: logged.note ?? '' })
  return row.index
}
