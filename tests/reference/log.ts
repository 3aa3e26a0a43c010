// The site's log a second time, from its description and from RFC 9162 alone: every hash is worked out anew by recursion over whole
// slices, and signed notes go through Node's own Ed25519. Nothing here is shared with the product.
import { createPublicKey, type KeyObject, sign, verify } from 'node:crypto'
import { hex, type Json, jcs, sha256, unhex, utf8 } from './record.ts'

/** RFC 9162 section 2.1.1: the hash of a list of leaves' data. */
export function treeHash(leaves: readonly Uint8Array[]): Buffer {
  const [only, ...more] = leaves
  if (!only) return sha256()
  if (more.length === 0) return sha256(Buffer.of(0), only)
  const k = splitOf(leaves.length)
  return sha256(Buffer.of(1), treeHash(leaves.slice(0, k)), treeHash(leaves.slice(k)))
}

/** The largest power of two below n. */
const splitOf = (n: number): number => 2 ** (Math.ceil(Math.log2(n)) - 1)

/** Section 2.1.3.1: PATH(m, D). */
export function inclusionPath(m: number, leaves: readonly Uint8Array[]): Buffer[] {
  if (leaves.length <= 1) return []
  const k = splitOf(leaves.length)
  const [left, right] = [leaves.slice(0, k), leaves.slice(k)]
  return m < k ? [...inclusionPath(m, left), treeHash(right)] : [...inclusionPath(m - k, right), treeHash(left)]
}

/** Section 2.1.4.1: PROOF(m, D). */
export function consistencyProof(m: number, leaves: readonly Uint8Array[]): Buffer[] {
  const subproof = (of: number, part: readonly Uint8Array[], whole: boolean): Buffer[] => {
    if (of === part.length) return whole ? [] : [treeHash(part)]
    const k = splitOf(part.length)
    const [left, right] = [part.slice(0, k), part.slice(k)]
    return of <= k
      ? [...subproof(of, left, whole), treeHash(right)]
      : [...subproof(of - k, right, false), treeHash(left)]
  }
  return subproof(m, leaves, true)
}

/** The root to which a path leads from leaf m of n; null where the path has another length. */
export function rootFromPath(m: number, n: number, leafHash: Uint8Array, path: readonly Uint8Array[]): Buffer | null {
  if (m >= n) return null
  if (n === 1) return path.length === 0 ? Buffer.from(leafHash) : null
  const top = path.at(-1)
  if (!top) return null
  const k = splitOf(n)
  const rest = path.slice(0, -1)
  const below = m < k ? rootFromPath(m, k, leafHash, rest) : rootFromPath(m - k, n - k, leafHash, rest)
  if (!below) return null
  return m < k ? sha256(Buffer.of(1), below, top) : sha256(Buffer.of(1), top, below)
}

/** The two roots to which a consistency proof leads; null where it has another length. `first` is needed where whole. */
export function rootsFromProof(
  m: number,
  n: number,
  firstRoot: Uint8Array,
  proof: readonly Uint8Array[],
): readonly [old: Buffer, now: Buffer] | null {
  const climb = (
    of: number,
    size: number,
    whole: boolean,
    left: readonly Uint8Array[],
  ): readonly [Buffer, Buffer] | null => {
    if (of === size) {
      const own = whole ? firstRoot : left[0]
      if (!own || left.length !== (whole ? 0 : 1)) return null
      return [Buffer.from(own), Buffer.from(own)]
    }
    const top = left.at(-1)
    if (!top) return null
    const k = splitOf(size)
    const rest = left.slice(0, -1)
    if (of <= k) {
      const below = climb(of, k, whole, rest)
      return below && [below[0], sha256(Buffer.of(1), below[1], top)]
    }
    const below = climb(of - k, size - k, false, rest)
    return below && [sha256(Buffer.of(1), top, below[0]), sha256(Buffer.of(1), top, below[1])]
  }
  return m < 1 || m > n ? null : climb(m, n, true, proof)
}

/** A leaf of the log (section 13); what is not given is null. */
export function logLeaf(members: { at: string; event: string; organisation: string; [member: string]: Json }): Buffer {
  return utf8(
    jcs({ digest: null, draw: null, format: 'evenpenny/1', kind: 'log', note: null, supersedes: null, ...members }),
  )
}

/** note = SHA256(0x07 || salt || text). */
export const noteDigest = (salt: Uint8Array, text: string): string => hex(sha256(Buffer.of(7), salt, utf8(text)))

const rawKey = (key: KeyObject): Buffer => createPublicKey(key).export({ format: 'der', type: 'spki' }).subarray(-32)

/** First four bytes of SHA-256(name || 0x0A || type || key). */
export const keyId = (name: string, type: number, raw: Uint8Array): Buffer =>
  sha256(utf8(`${name}\n`), Buffer.of(type), raw).subarray(0, 4)

/** A signed checkpoint, as text. */
export function checkpoint(origin: string, leaves: readonly Uint8Array[], key: KeyObject): string {
  const text = `${origin}\n${leaves.length}\n${treeHash(leaves).toString('base64')}\n`
  const line = Buffer.concat([keyId(origin, 1, rawKey(key)), sign(null, utf8(text), key)]).toString('base64')
  return `${text}\n— ${origin} ${line}\n`
}

/** Origin, size and root of a checkpoint that this key signed; null otherwise. */
export function readCheckpoint(note: string, raw: Uint8Array): { origin: string; size: number; root: string } | null {
  const match = /^((.+)\n(0|[1-9]\d*)\n([\w+/=]{44})\n)\n(?:— (.+) ([\w+/=]+)\n)+$/.exec(note)
  if (!match) return null
  const [, text = '', origin = '', size = '', root = ''] = match
  const der = Buffer.concat([unhex('302a300506032b6570032100'), raw])
  const key = createPublicKey({ key: der, format: 'der', type: 'spki' })
  const good = note
    .slice(text.length + 1)
    .split('\n')
    .some((line) => {
      const [, name, encoded = ''] = line.split(' ')
      const bytes = Buffer.from(encoded, 'base64')
      return (
        name === origin &&
        bytes.subarray(0, 4).equals(keyId(origin, 1, raw)) &&
        verify(null, utf8(text), key, bytes.subarray(4))
      )
    })
  return good ? { origin, size: Number(size), root: hex(Buffer.from(root, 'base64')) } : null
}

/** `log-proof.json`: these entries of the log, with their paths. */
export function logProof(indexes: readonly number[], leaves: readonly Buffer[]): Buffer {
  const entries = indexes.map((index) => ({
    index,
    leaf: (leaves[index] ?? Buffer.alloc(0)).toString('utf8'),
    path: inclusionPath(index, leaves).map(hex),
  }))
  return utf8(jcs({ entries, format: 'evenpenny/1', kind: 'log-proof' }))
}
