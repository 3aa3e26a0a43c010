import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, throwIfCancelled } from '#shared/protocol/check/state.ts'
import { checkReceipt, parseReceipt } from '#shared/protocol/receipt.ts'

const MAX_RECEIPT = 2 ** 20

/** Step 12: receipts and short proofs, where given (PROTOCOL section 10); later members are named, not examined. */
export const checkReceipts: CheckStep = (state) => {
  const found: string[] = []
  for (const { name, bytes } of state.options.receipts ?? []) {
    throwIfCancelled(state)
    if (bytes.length > MAX_RECEIPT) throw new StepFailure('member-too-long', name, 'No receipt is so long.')
    const receipt = need(parseReceipt(bytes), name)
    need(checkReceipt(state.tools.sha256, receipt, state.seal, state.sealDigestHex), name)
    const what = receipt.kind === 'receipt' ? 'receipt' : 'short proof'
    const tickets = receipt.tickets === 1 ? '1 ticket' : `${receipt.tickets} tickets`
    found.push(`The ${what} ${name} holds: leaf ${receipt.leaf} with ${tickets} is in the sealed list.`)
  }
  if (found.length === 0) found.push('No receipt was given.')
  if (state.notExamined.length > 0) found.push(`Not examined: ${state.notExamined.join(', ')}.`)
  return found.join(' ')
}
