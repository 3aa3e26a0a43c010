import { sha256 } from '@noble/hashes/sha2.js'
import { utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { parseSeal } from '#shared/protocol/seal.ts'
import { checkReceipt, parseReceipt } from '#shared/protocol/receipt.ts'

export type ReceiptProof =
  | { readonly kind: 'proven'; readonly digest: string; readonly tickets: number; readonly total: number }
  | { readonly kind: 'replaced' }
  | { readonly kind: 'wrong'; readonly words: string }
  | { readonly kind: 'unreachable' }

/**
 * Proves a receipt against the seal that is public (PROTOCOL section 10): the seal is fetched as everybody gets it, its
 * digest is made here, and the receipt's path is added and hashed up to its root, by the code that every check uses.
 */
export async function proveReceipt(receipt: string, slug: string, fetchFile: typeof fetch): Promise<ReceiptProof> {
  let bytes: Uint8Array
  try {
    const answer = await fetchFile(`/draws/${slug}/seal.json`, { credentials: 'omit', cache: 'no-store' })
    if (!answer.ok) return { kind: 'unreachable' }
    bytes = new Uint8Array(await answer.arrayBuffer())
  } catch {
    return { kind: 'unreachable' }
  }
  const parsed = parseReceipt(utf8(receipt))
  if (!parsed.ok) return { kind: 'wrong', words: parsed.error.message }
  // Which network a seal names is for the whole check to judge; here it only has to be this receipt's seal.
  const seal = parseSeal(bytes, { allowDevelopmentChain: true })
  if (!seal.ok) return { kind: 'wrong', words: `The public seal cannot be read: ${seal.error.message}` }
  const digest = toHex(sha256(bytes))
  if (parsed.value.seal !== digest) return { kind: 'replaced' }
  const held = checkReceipt(sha256, parsed.value, seal.value, digest)
  if (!held.ok) return { kind: 'wrong', words: held.error.message }
  return { kind: 'proven', digest, tickets: parsed.value.tickets, total: seal.value.entries.tickets }
}

export interface SumStep {
  /** What stands beside: its tickets, and on which side. */
  readonly beside: number
  readonly side: 'L' | 'R'
  /** Their own side so far. */
  readonly own: number
  readonly sum: number
}

/** A receipt's path as sums: the number beside, added step by step, comes to the sealed total. Empty for a wrong receipt. */
export function sumsOf(receipt: string): readonly SumStep[] {
  const parsed = parseReceipt(utf8(receipt))
  if (!parsed.ok) return []
  let own = parsed.value.tickets
  return parsed.value.path.map(({ side, tickets }) => {
    const step = { beside: tickets, side, own, sum: own + tickets }
    own = step.sum
    return step
  })
}
