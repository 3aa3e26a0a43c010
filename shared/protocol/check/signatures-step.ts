import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckState, type CheckStep, memberBytes } from '#shared/protocol/check/state.ts'
import { decodePem, isSoundPublicKey, keyFingerprint, verifySignature } from '#shared/protocol/signature.ts'

/** Step 2: both signatures and the key (PROTOCOL section 9). */
export const checkSignatures: CheckStep = async (state) => {
  const publicKey = decodePem(await memberBytes(state, 'site-key.pem'))
  if (publicKey === null) {
    const message = 'This is not an Ed25519 public key (SubjectPublicKeyInfo, PEM) written as OpenSSL writes it.'
    throw new StepFailure('key-malformed', 'site-key.pem', message)
  }
  if (!isSoundPublicKey(publicKey)) {
    throw new StepFailure(
      'key-unsound',
      'site-key.pem',
      'The key is not canonical, or under it one signature fits many texts.',
    )
  }
  state.publicKey = publicKey
  state.fingerprint = keyFingerprint(state.tools.sha256, publicKey)
  const seal = await signed(state, 'seal')
  await signed(state, 'result')
  const named = keyNamedBy(seal)
  if (named !== null && named !== state.fingerprint) {
    throw new StepFailure(
      'key-not-the-seals',
      'seal.json key',
      'The seal names another key than the one in site-key.pem.',
    )
  }
  const expected = state.options.expectedKey
  if (expected !== undefined && expected !== state.fingerprint) {
    const message = `The key's fingerprint is ${state.fingerprint}, and not the one that was given to compare.`
    throw new StepFailure('key-not-the-expected', 'site-key.pem', message)
  }
  const whose = expected === undefined ? 'an unknown key' : 'the key whose fingerprint was given'
  return `Seal and result are signed by ${whose}, fingerprint ${state.fingerprint}.`
}

async function signed(state: CheckState, record: 'seal' | 'result'): Promise<Uint8Array> {
  const message = await memberBytes(state, `${record}.json`)
  const file = `${record}.sig` as const
  if (state.source.size(file) !== 64) {
    throw new StepFailure('signature-length', file, 'An Ed25519 signature has 64 bytes.')
  }
  const signature = await memberBytes(state, file)
  if (!verifySignature(state.publicKey, message, signature)) {
    const words = `This is not the signature of the key in site-key.pem over ${record}.json.`
    throw new StepFailure(`${record}-signature`, file, words)
  }
  return message
}

/** The key that a seal names, before anything else of it is looked at; null where step 3 will refuse it anyway. */
function keyNamedBy(seal: Uint8Array): string | null {
  try {
    const value: unknown = JSON.parse(decodeUtf8(seal) ?? '')
    return typeof value === 'object' && value !== null && 'key' in value && typeof value.key === 'string'
      ? value.key
      : null
  } catch {
    return null
  }
}
