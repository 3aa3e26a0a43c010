import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { isTermsText } from '#shared/bytes/text.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, memberBytes } from '#shared/protocol/check/state.ts'
import { parseSeal } from '#shared/protocol/seal.ts'

/** Step 3: the seal, every rule of PROTOCOL section 3, and the terms. */
export const checkSeal: CheckStep = async (state) => {
  const { sha256 } = state.tools
  const bytes = await memberBytes(state, 'seal.json')
  const allowDevelopmentChain = state.options.allowDevelopmentChain === true
  const seal = need(parseSeal(bytes, { allowDevelopmentChain }), 'seal.json')
  if (seal.key !== state.fingerprint) {
    throw new StepFailure(
      'key-not-the-seals',
      'seal.json key',
      'The seal names another key than the one in site-key.pem.',
    )
  }
  const terms = await memberBytes(state, 'terms.txt')
  if (toHex(sha256(terms)) !== seal.terms) {
    throw new StepFailure('terms-mismatch', 'terms.txt', 'These are not the terms that were sealed.')
  }
  const text = decodeUtf8(terms)
  if (text === null || !isTermsText(text)) {
    const message = 'Terms are UTF-8 text without control characters that ends with exactly one line feed.'
    throw new StepFailure('terms-malformed', 'terms.txt', message)
  }
  state.seal = seal
  state.sealDigest = sha256(bytes)
  state.sealDigestHex = toHex(state.sealDigest)
  const picks = seal.prizes.reduce((sum, prize) => sum + prize.quantity, seal.reserves)
  return `The seal of the draw ${seal.draw}, ${JSON.stringify(seal.title)}, for ${picks} picks; its digest is ${state.sealDigestHex}.`
}
