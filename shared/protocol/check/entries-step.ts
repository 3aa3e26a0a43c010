import { toHex } from '#shared/bytes/hex.ts'
import { streamSumTree } from '#shared/merkle/sum-tree.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, throwIfCancelled } from '#shared/protocol/check/state.ts'
import { duplicateCommit } from '#shared/protocol/duplicate-commit.ts'

const MEMBER = 'entries.csv'
/** Leaves hashed at a stretch, before other work is let in: some tens of milliseconds. */
const STRETCH = 16_384

/** Step 4: entries.csv, read in step 1, against the sealed count, total and root (PROTOCOL sections 1, 2 and 9). */
export const checkEntries: CheckStep = async (state) => {
  const { count, root, tickets: total } = state.seal.entries
  const { tickets, entryCommits, outcome } = state.entries
  const found = need(outcome, MEMBER)
  if (found.count !== count) {
    throw new StepFailure('count-mismatch', MEMBER, `It holds ${found.count} entrants, and the seal states ${count}.`)
  }
  if (found.tickets !== total) {
    throw new StepFailure('total-mismatch', MEMBER, `It holds ${found.tickets} tickets, and the seal states ${total}.`)
  }
  const tree = streamSumTree(state.tools.sha256)
  for (let leaf = 0; leaf < count; ) {
    const end = Math.min(count, leaf + STRETCH)
    for (; leaf < end; leaf++) tree.add(tickets[leaf] ?? 0, entryCommits.subarray(32 * leaf, 32 * leaf + 32))
    throwIfCancelled(state)
    state.progress(leaf, count)
    await state.tools.pause?.()
  }
  const computed = tree.result().root
  state.entriesRoot = computed
  if (toHex(computed) !== root) {
    const message = `It leads to the root ${toHex(computed)}, and the seal states ${root}.`
    throw new StepFailure('root-mismatch', MEMBER, message)
  }
  const twice = duplicateCommit(entryCommits, computed)
  if (twice !== null) {
    const message = 'This commitment stands on an earlier line.'
    throw new StepFailure('commitment-twice', `${MEMBER} line ${twice + 2}`, message)
  }
  return `${count} entrants with ${total} tickets lead to the sealed root ${root}.`
}
