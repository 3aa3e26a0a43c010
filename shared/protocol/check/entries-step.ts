import { toHex } from '#shared/bytes/hex.ts'
import { streamSumTree } from '#shared/merkle/sum-tree.ts'
import { duplicateCommit } from '#shared/protocol/duplicate-commit.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, streamMember } from '#shared/protocol/check/state.ts'
import { EntriesParser } from '#shared/protocol/entries-csv.ts'

const MEMBER = 'entries.csv'

/** Step 4: entries.csv against the sealed count, total and root (PROTOCOL sections 1, 2 and 9). */
export const checkEntries: CheckStep = async (state) => {
  const { count, root, tickets: total } = state.seal.entries
  const tickets = new Float64Array(count)
  const entryCommits = new Uint8Array(32 * count)
  const tree = streamSumTree(state.tools.sha256)
  let leaf = 0
  const parser = new EntriesParser((held, commit) => {
    if (leaf < count) {
      tickets[leaf] = held
      entryCommits.set(commit, 32 * leaf)
      tree.add(held, commit)
    }
    leaf++
  })
  for await (const chunk of streamMember(state, MEMBER)) {
    const failure = parser.push(chunk)
    if (failure !== null) need({ ok: false, error: failure }, MEMBER)
    if (leaf > count) throw countDiffers(leaf, count)
  }
  const end = need(parser.end(), MEMBER)
  if (end.count !== count) throw countDiffers(end.count, count)
  if (end.tickets !== total) {
    throw new StepFailure('total-mismatch', MEMBER, `It holds ${end.tickets} tickets, and the seal states ${total}.`)
  }
  const found = tree.result()
  if (toHex(found.root) !== root) {
    throw new StepFailure(
      'root-mismatch',
      MEMBER,
      `It leads to the root ${toHex(found.root)}, and the seal states ${root}.`,
    )
  }
  const twice = duplicateCommit(entryCommits, found.root)
  if (twice !== null) {
    throw new StepFailure(
      'commitment-twice',
      `${MEMBER} line ${twice + 2}`,
      'This commitment stands on an earlier line.',
    )
  }
  state.tickets = tickets
  state.entryCommits = entryCommits
  return `${count} entrants with ${total} tickets lead to the sealed root ${root}.`
}

function countDiffers(found: number, sealed: number): StepFailure {
  const message =
    found > sealed
      ? `It holds more than the ${sealed} entrants that the seal states.`
      : `It holds ${found} entrants, and the seal states ${sealed}.`
  return new StepFailure('count-mismatch', MEMBER, message)
}
