const WORDS = 8

/**
 * The first leaf whose 32-byte commitment stands before it, or null (PROTOCOL section 1: no two are equal). Linear in
 * time, 8 to 16 bytes a leaf. `key`, 32 bytes, must depend on all the commitments, as the tree's root does: whoever
 * writes a hostile list then cannot choose commitments that crowd together in the table.
 */
export function duplicateCommit(commits: Uint8Array, key: Uint8Array): number | null {
  const count = commits.length / 32
  const words = wordsOf(commits)
  const factors = wordsOf(key).map((word) => word | 1)
  let size = 16
  while (size < 2 * count) size *= 2
  // Leaf + 1; 0 is an empty place.
  const table = new Uint32Array(size)
  let first: number | null = null
  for (let leaf = 0; leaf < count && first === null; leaf++) {
    let hash = 0
    for (let word = 0; word < WORDS; word++) {
      hash = Math.imul(hash ^ words[leaf * WORDS + word]!, factors[word]!)
      hash ^= hash >>> 15
    }
    let place = hash & (size - 1)
    for (let other = table[place]!; other !== 0; other = table[place]!) {
      if (same(words, other - 1, leaf)) {
        first = leaf
        break
      }
      place = (place + 1) & (size - 1)
    }
    table[place] = leaf + 1
  }
  return first
}

function same(words: Uint32Array, a: number, b: number): boolean {
  for (let word = 0; word < WORDS; word++) {
    if (words[a * WORDS + word] !== words[b * WORDS + word]) return false
  }
  return true
}

/** The bytes as 32-bit words in whatever order the machine has: only equality and spread matter. */
function wordsOf(bytes: Uint8Array): Uint32Array {
  const aligned = bytes.byteOffset % 4 === 0 ? bytes : bytes.slice()
  return new Uint32Array(aligned.buffer, aligned.byteOffset, aligned.length / 4)
}
