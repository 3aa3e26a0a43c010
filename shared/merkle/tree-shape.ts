/**
 * The shape shared by every tree here (RFC 9162 section 2.1.1): a run of n > 1 leaves is split after its first k, k
 * the largest power of two smaller than n. Level by level that is the same as pairing neighbours and carrying an odd
 * last node up unchanged, which is how the trees are built.
 */

/** On which side of the path the sibling stands. */
export type Side = 'L' | 'R'

/** How many nodes each level has, leaves first, root last. Requires size ≥ 1. */
export function levelSizes(size: number): readonly number[] {
  if (!Number.isSafeInteger(size) || size < 1) throw new RangeError(`no tree has ${size} leaves`)
  const sizes = [size]
  for (let n = size; n > 1; ) {
    n = Math.ceil(n / 2)
    sizes.push(n)
  }
  return sizes
}

/** The sides of leaf `index`'s siblings from the leaf up. Requires 0 ≤ index < size; throws a RangeError otherwise. */
export function siblingSides(index: number, size: number): readonly Side[] {
  if (!Number.isSafeInteger(index) || index < 0 || index >= size) throw new RangeError(`no leaf ${index} of ${size}`)
  const sides: Side[] = []
  let at = index
  for (const nodes of levelSizes(size)) {
    if (at % 2 === 1) sides.push('L')
    else if (at + 1 < nodes) sides.push('R')
    at = Math.floor(at / 2)
  }
  return sides
}
