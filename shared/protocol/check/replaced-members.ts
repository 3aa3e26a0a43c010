import { readMember } from '#shared/archive/members-source.ts'
import { isReplacedMember, type ReplacedMember } from '#shared/archive/members.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckState, memberBytes } from '#shared/protocol/check/state.ts'
import { parseReplaced, type ReplacedSeal } from '#shared/protocol/replaced.ts'
import { parseSeal } from '#shared/protocol/seal.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import { verifySignature } from '#shared/protocol/signature.ts'
import { verifyTimestamp } from '#shared/timestamp/verify-timestamp.ts'

const LIMITS = { json: 2 ** 26, sig: 2 ** 10, tsr: 2 ** 16 } as const

/**
 * The seals that were replaced before the one in force: `replaced.json` names them, oldest first, with how each next list
 * differs; `replaced-N.json` are their bytes, each named by `supersedes` of the one after it, so that none can be left out.
 */
export async function checkReplaced(state: CheckState): Promise<readonly string[]> {
  const files = state.source.names.filter(isReplacedMember)
  const { supersedes } = state.seal
  if (!state.source.names.includes('replaced.json')) {
    const [stray] = files
    if (stray !== undefined) {
      throw new StepFailure('member-missing', 'replaced.json', `The archive has ${stray} and no replaced.json.`)
    }
    return supersedes === null ? [] : ['The seals that this one replaced are not in the archive.']
  }
  const replaced = need(parseReplaced(await memberBytes(state, 'replaced.json')), 'replaced.json')
  const known = new Set<string>(
    replaced.flatMap((_, i) => ['json', 'sig', 'tsr'].map((end) => `replaced-${i + 1}.${end}`)),
  )
  const extra = files.find((name) => !known.has(name))
  if (extra !== undefined) {
    throw new StepFailure('replaced-chain', extra, 'replaced.json names no seal with this number.')
  }
  const seals: Seal[] = []
  let before: string | null = null
  let foreign = 0
  for (const [i, entry] of replaced.entries()) {
    const name = `replaced-${i + 1}.json` as const
    const bytes = await fileOf(state, name)
    const digest = toHex(state.tools.sha256(bytes))
    if (digest !== entry.seal) {
      throw new StepFailure('replaced-chain', name, `Its digest is ${digest}, and replaced.json names ${entry.seal}.`)
    }
    const allowDevelopmentChain = state.options.allowDevelopmentChain === true
    const seal = need(parseSeal(bytes, { allowDevelopmentChain }), name)
    if (seal.draw !== state.seal.draw) throw new StepFailure('replaced-chain', `${name} draw`, 'It is of another draw.')
    if (seal.supersedes !== before) {
      const words =
        before === null ? 'The first seal replaces none.' : `It does not name ${before}, the seal before it.`
      throw new StepFailure('replaced-chain', `${name} supersedes`, words)
    }
    if (!(await signedByTheKey(state, seal, bytes, `replaced-${i + 1}.sig`))) foreign += 1
    await checkItsTimestamp(state, digest, `replaced-${i + 1}.tsr`)
    seals.push(seal)
    before = digest
  }
  if (supersedes !== before) {
    throw new StepFailure(
      'replaced-chain',
      'seal.json supersedes',
      `It does not name ${before}, the last one replaced.`,
    )
  }
  checkCounts(replaced, [...seals, state.seal])
  const signed = foreign === 0 ? '' : ` ${foreign} of them are signed by an earlier key, which is not in the archive.`
  return [
    `${replaced.length === 1 ? '1 seal was' : `${replaced.length} seals were`} replaced before this one.${signed}`,
  ]
}

async function fileOf(state: CheckState, name: ReplacedMember): Promise<Uint8Array> {
  const limit = LIMITS[name.slice(name.lastIndexOf('.') + 1) as keyof typeof LIMITS]
  if (!state.source.names.includes(name)) {
    throw new StepFailure('member-missing', name, `replaced.json names it, and the archive has no ${name}.`)
  }
  const bytes = await readMember(state.source, name, limit)
  if (bytes === null)
    throw new StepFailure('member-too-long', name, `It is longer than the ${limit} bytes it may have.`)
  return bytes
}

/** False where another key signed, which the archive does not hold; its bytes are bound by the chain all the same. */
async function signedByTheKey(
  state: CheckState,
  seal: Seal,
  bytes: Uint8Array,
  name: ReplacedMember,
): Promise<boolean> {
  const signature = await fileOf(state, name)
  if (signature.length !== 64) throw new StepFailure('signature-length', name, 'An Ed25519 signature has 64 bytes.')
  if (seal.key !== state.fingerprint) return false
  if (!verifySignature(state.publicKey, bytes, signature)) {
    throw new StepFailure('replaced-signature', name, 'This is not the signature of the key in site-key.pem over it.')
  }
  return true
}

/** A seal from before timestamps has none; where there is one it must be of this seal. Who vouches for it matters no more. */
async function checkItsTimestamp(state: CheckState, digest: string, name: ReplacedMember): Promise<void> {
  if (!state.source.names.includes(name)) return
  need(verifyTimestamp(await fileOf(state, name), { imprint: hexBytes(digest, 32), trusted: [] }), name)
}

/** From one list to the next: whom it lost and gained. */
function checkCounts(replaced: readonly ReplacedSeal[], seals: readonly Seal[]): void {
  for (const [i, { added, removed, changed }] of replaced.entries()) {
    const [old, next] = [seals[i]?.entries.count ?? 0, seals[i + 1]?.entries.count ?? 0]
    if (removed > old || changed > old - removed || old - removed + added !== next) {
      const words = `From ${old} entrants to ${next}, ${added} added, ${removed} removed and ${changed} changed do not add up.`
      throw new StepFailure('replaced-counts', `replaced.json seals[${i}]`, words)
    }
  }
}
