import { assertBytes } from '../bytes/bytes.ts'

/**
 * Index of the first leaf whose commitment stood before (PROTOCOL section 1: no two are equal), or null. 32 bytes a
 * leaf. A hash table over the bytes as they lie; commitments made up to collide in it only make it slower, because
 * after too many collisions a set of strings, whose hashing nobody can foresee, takes over.
 */
export function firstDuplicateCommit(entryCommits: Uint8Array): number | null {
  assertBytes(entryCommits, 'entryCommits')
  const count = entryCommits.length / 32
  if (!Number.isInteger(count)) throw new RangeError('commitments have 32 bytes each')
  const mask = 2 ** Math.ceil(Math.log2(count * 2 + 2)) - 1
  // Holds leaf + 1; 0 is free.
  const table = new Uint32Array(mask + 1)
  let patience = 20 * count + 1000
  for (let leaf = 0; leaf < count; leaf += 1) {
    let slot = mixed(entryCommits, leaf * 32) & mask
    for (let other = table[slot] as number; other !== 0; other = table[slot] as number) {
      if (sameCommit(entryCommits, leaf, other - 1)) return leaf
      patience -= 1
      if (patience < 0) return firstDuplicateBySet(entryCommits)
      slot = (slot + 1) & mask
    }
    table[slot] = leaf + 1
  }
  return null
}

function firstDuplicateBySet(entryCommits: Uint8Array): number | null {
  const seen = new Set<string>()
  for (let leaf = 0; leaf * 32 < entryCommits.length; leaf += 1) {
    const key = String.fromCharCode(...entryCommits.subarray(leaf * 32, leaf * 32 + 32))
    if (seen.has(key)) return leaf
    seen.add(key)
  }
  return null
}

function mixed(bytes: Uint8Array, at: number): number {
  let hash = 0
  for (let i = 0; i < 32; i += 1) hash = Math.imul(hash ^ (bytes[at + i] as number), 0x01000193) + 0x7f4a7c15
  return (hash ^ (hash >>> 15)) >>> 0
}

function sameCommit(bytes: Uint8Array, left: number, right: number): boolean {
  for (let i = 0; i < 32; i += 1) if (bytes[left * 32 + i] !== bytes[right * 32 + i]) return false
  return true
}
