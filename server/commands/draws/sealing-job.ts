import { refused } from '#server/commands/command-error.ts'
import type { Transaction } from '#server/commands/transaction.ts'
import { hasLiveJob } from '#server/store/queries/jobs.ts'

/** Longer lists are sealed by the worker: committing a million entrants takes a minute. */
export const SEAL_AT_ONCE = 2000

/** While a worker makes the seal of a long list, the draw is left alone. */
export async function refuseWhileSealing(tx: Transaction, drawId: string): Promise<void> {
  if (await hasLiveJob(tx.db, 'seal', drawId)) {
    throw refused('The list is being sealed at this moment. Wait until that is done, and load the page again.')
  }
}
