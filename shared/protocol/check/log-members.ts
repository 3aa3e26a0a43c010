import type { LaterMember } from '#shared/archive/members.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { openCheckpoint } from '#shared/log/checkpoint.ts'
import { checkLogProof, parseLogProof } from '#shared/log/log-proof.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckState, memberBytes } from '#shared/protocol/check/state.ts'

const LOG = ['checkpoint.txt', 'log-proof.json'] as const satisfies readonly LaterMember[]

/**
 * What the site's log says of the draw (PROTOCOL section 13): `checkpoint.txt` is signed by the seal's key, and by the
 * paths in `log-proof.json` its root holds the draw's opening, this seal and this result, in this order. Archives from
 * before the log have neither member; one alone fails.
 */
export async function checkLog(state: CheckState): Promise<readonly string[]> {
  state.log = null
  const present = LOG.filter((name) => state.source.names.includes(name))
  if (present.length === 0) return []
  const missing = LOG.find((name) => !present.includes(name))
  if (missing !== undefined) {
    throw new StepFailure('member-missing', missing, `The archive has ${present.join('')} and no ${missing}.`)
  }
  const { sha256 } = state.tools
  const trusted = { publicKeys: [state.publicKey] }
  const head = need(openCheckpoint(sha256, await memberBytes(state, 'checkpoint.txt'), trusted), 'checkpoint.txt')
  const entries = need(parseLogProof(await memberBytes(state, 'log-proof.json')), 'log-proof.json')
  const drawn = {
    draw: state.seal.draw,
    sealDigest: state.sealDigestHex,
    resultDigest: state.digests.get('result.json') ?? '',
  }
  const { sealed } = need(checkLogProof(sha256, entries, head.checkpoint, drawn), 'log-proof.json')
  state.log = { head, sealed }
  const { origin, size, root } = head.checkpoint
  return [
    `The log ${origin}, ${size} entries with the root ${toHex(root)}, holds ${entries.length} entries of this draw; entry ${sealed.index} is this seal.`,
  ]
}
