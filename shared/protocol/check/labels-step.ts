import { equalBytes } from '#shared/bytes/bytes.ts'
import { hexBytes } from '#shared/bytes/hex.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, memberBytes } from '#shared/protocol/check/state.ts'
import { createCommitter } from '#shared/protocol/commitments.ts'
import { checkLabels, parseLabels } from '#shared/protocol/labels.ts'

/** Step 10: every label and commitment against its leaf (PROTOCOL sections 1 and 8). */
export const checkLabelsAndCommitments: CheckStep = async (state) => {
  const { sha256 } = state.tools
  const { picks } = state.result
  const committer = createCommitter(sha256)
  for (const [index, pick] of picks.entries()) {
    const commit = committer.entry(hexBytes(pick.labelCommit, 32), hexBytes(pick.identityCommit, 32))
    if (!equalBytes(commit, state.entries.entryCommits.subarray(32 * pick.leaf, 32 * pick.leaf + 32))) {
      const message = `These commitments are not those of leaf ${pick.leaf}.`
      throw new StepFailure('commitment-mismatch', `result.json picks[${index}]`, message)
    }
  }
  const labels = need(parseLabels(await memberBytes(state, 'labels.jsonl')), 'labels.jsonl')
  need(checkLabels(sha256, labels, picks), 'labels.jsonl')
  const open = new Set(labels.map(({ leaf }) => leaf))
  const winners = new Set(picks.filter(({ award }) => 'prize' in award).map(({ leaf }) => leaf))
  state.withheld = [...winners].filter((leaf) => !open.has(leaf))
  const found = `${picks.length} picks carry their leaves' commitments, and ${labels.length} opened labels fit theirs.`
  if (state.withheld.length === 0) return found
  return `${found} Label withheld: ${state.withheld.length} of ${winners.size} winning leaves.`
}
