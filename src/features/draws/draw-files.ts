import type { DrawPage } from '#shared/schemas/api/public.ts'

export interface DrawFile {
  readonly name: string
  readonly what: string
}

const SEALED: readonly DrawFile[] = [
  { name: 'seal.json', what: 'The seal, the very bytes that were signed' },
  { name: 'seal.sig', what: 'Its Ed25519 signature, 64 bytes' },
  { name: 'entries.csv', what: 'The sealed list: ticket counts and commitments, no names' },
  { name: 'terms.txt', what: 'The terms as published' },
  { name: 'site-key.pem', what: 'The public key that signs' },
]
const STAMP: DrawFile = { name: 'seal.tsr', what: 'The seal’s timestamp, by somebody other than this site (RFC 3161)' }
const DRAWN: readonly DrawFile[] = [
  { name: 'result.json', what: 'The result, the very bytes that were signed' },
  { name: 'result.sig', what: 'Its signature' },
  { name: 'transcript.jsonl', what: 'Every coin of every pick, a line for each pick' },
  { name: 'labels.jsonl', what: 'The words that announce the winners, with what proves them' },
]

/** The public files of a draw as it stands now. */
export function drawFiles(draw: Pick<DrawPage, 'seal' | 'result'>): readonly DrawFile[] {
  return [
    ...(draw.seal ? SEALED : []),
    ...(draw.seal?.timestamp ? [STAMP] : []),
    ...(draw.result ? DRAWN : []),
    ...(draw.result?.archive ? [{ name: 'proof.zip', what: 'All of them in one, with the check' }] : []),
  ]
}
