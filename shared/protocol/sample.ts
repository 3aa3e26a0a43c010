import { utf8 } from '../bytes/bytes.ts'
import { hkdfSha256, type Sha256 } from '../bytes/hashing.ts'
import { derivedFlips } from '../sampling/flips.ts'
import { CountTree, type Walk } from '../sampling/walk.ts'
import { SAMPLE_WALKS } from './limits.ts'

/** sampleKey = HKDF(salt = root, ikm = the round's randomness, info = "evenpenny/1 sample"), 32 bytes (section 12). */
export function deriveSampleKey(sha256: Sha256, root: Uint8Array, randomness: Uint8Array): Uint8Array {
  if (root.length !== 32 || randomness.length !== 32) throw new RangeError('root and randomness have 32 bytes')
  return hkdfSha256(sha256, { salt: root, ikm: randomness, info: utf8('evenpenny/1 sample'), length: 32 })
}

/**
 * The witness's sample of a closed list (PROTOCOL section 12): 59 walks, or fewer if the tickets run out, under
 * `every-ticket`. A leaf may come more than once, as often as it has tickets.
 */
export function sampleWalks(
  sha256: Sha256,
  input: {
    /** Counts in leaf order. */
    readonly tickets: ArrayLike<number>
    readonly root: Uint8Array
    readonly randomness: Uint8Array
  },
): readonly Walk[] {
  const key = deriveSampleKey(sha256, input.root, input.randomness)
  const tree = new CountTree(input.tickets)
  const walks: Walk[] = []
  for (let k = 0; k < SAMPLE_WALKS && tree.remaining > 0; k += 1) {
    const walk = tree.walk(derivedFlips(sha256, key, k))
    if (walk === null) throw new Error('a derived stream has run dry')
    tree.remove(walk.leaf, 'every-ticket')
    walks.push(walk)
  }
  return walks
}
