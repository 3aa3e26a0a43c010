import type { Sha256 } from '#shared/bytes/hashing.ts'
import { checkLog } from '#shared/protocol/check/log-members.ts'
import { checkReplaced } from '#shared/protocol/check/replaced-members.ts'
import { checkTimestamp, checkWitnessed } from '#shared/protocol/check/time-members.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, type GivenReceipt, throwIfCancelled } from '#shared/protocol/check/state.ts'
import { checkReceipt, parseReceipt } from '#shared/protocol/receipt.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'

/** Bytes of a receipt or short proof, at most. */
export const MAX_RECEIPT = 2 ** 20

/** What a receipt or short proof shows against a seal whose digest, in hex, is given; throws StepFailure. */
export function examineReceipt(
  sha256: Sha256,
  { name, bytes }: GivenReceipt,
  seal: Pick<Seal, 'entries'>,
  sealDigestHex: string,
): string {
  if (bytes.length > MAX_RECEIPT) throw new StepFailure('member-too-long', name, 'No receipt is so long.')
  const receipt = need(parseReceipt(bytes), name)
  need(checkReceipt(sha256, receipt, seal, sealDigestHex), name)
  const what = receipt.kind === 'receipt' ? 'receipt' : 'short proof'
  const tickets = receipt.tickets === 1 ? '1 ticket' : `${receipt.tickets} tickets`
  return `The ${what} ${name} holds: leaf ${receipt.leaf} with ${tickets} is in the sealed list.`
}

/**
 * Step 12: receipts and short proofs, where given (PROTOCOL section 10), and of the later members those that the archive
 * has: what the site's log says of the draw, timestamps, witnesses, replaced seals. Others are named, not examined.
 */
export const checkReceipts: CheckStep = async (state) => {
  const found: string[] = []
  for (const given of state.options.receipts ?? []) {
    throwIfCancelled(state)
    found.push(examineReceipt(state.tools.sha256, given, state.seal, state.sealDigestHex))
  }
  if (found.length === 0) found.push('No receipt was given.')
  found.push(...(await checkLog(state)))
  state.shownBy = []
  state.notShown = []
  found.push(...(await checkTimestamp(state)))
  found.push(...(await checkWitnessed(state)))
  found.push(...(await checkReplaced(state)))
  if (state.notExamined.length > 0) found.push(`Not examined: ${state.notExamined.join(', ')}.`)
  return found.join(' ')
}
