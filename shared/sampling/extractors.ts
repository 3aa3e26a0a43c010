/**
 * Fair bits out of tosses of a coin that may be biased, but whose tosses are independent. Tosses are bytes, heads 1
 * and tails 0. Only Peres's extractor is part of the record (PROTOCOL section 4); the other two are its ancestors,
 * kept to explain and to measure it. Feed fixed lengths: bits taken at the moment when enough have come out are not
 * fair.
 */

/** Tosses written as `H` and `T`, as bytes 1 and 0. Throws a RangeError for any other character. */
export function parseTosses(text: string): Uint8Array {
  const tosses = new Uint8Array(text.length)
  for (let i = 0; i < text.length; i += 1) {
    const letter = text[i]
    if (letter !== 'H' && letter !== 'T') throw new RangeError('tosses are written as H and T')
    tosses[i] = letter === 'H' ? 1 : 0
  }
  return tosses
}

/** Bits written as `0` and `1`. */
export function bitText(bits: ArrayLike<number>): string {
  return Array.from(bits, (bit) => (bit === 1 ? '1' : '0')).join('')
}

/** The first toss of each unequal pair (von Neumann 1951). An odd last toss is dropped. */
export function vonNeumann(tosses: ArrayLike<number>): readonly number[] {
  const bits: number[] = []
  for (let i = 0; i + 1 < tosses.length; i += 2) {
    if (tosses[i] !== tosses[i + 1]) bits.push(tosses[i] as number)
  }
  return bits
}

/** Von Neumann's pairing, and the same again on the common values of the equal pairs, while there are two. */
export function multiLevel(tosses: ArrayLike<number>): readonly number[] {
  const bits: number[] = []
  for (let level: ArrayLike<number> = tosses; level.length >= 2; level = equalPairs(level)) {
    bits.push(...vonNeumann(level))
  }
  return bits
}

/**
 * Peres's ψ (Annals of Statistics 20, 1992; PROTOCOL section 4): the pairing, then ψ of the pairs' exclusive ors,
 * then ψ of the common values of the equal pairs. Nothing for fewer than two tosses. Meant for a round: 256 tosses at
 * most in the record.
 */
export function peres(tosses: ArrayLike<number>): readonly number[] {
  if (tosses.length < 2) return []
  const differences: number[] = []
  for (let i = 0; i + 1 < tosses.length; i += 2) differences.push(tosses[i] === tosses[i + 1] ? 0 : 1)
  return [...vonNeumann(tosses), ...peres(differences), ...peres(equalPairs(tosses))]
}

function equalPairs(tosses: ArrayLike<number>): readonly number[] {
  const common: number[] = []
  for (let i = 0; i + 1 < tosses.length; i += 2) {
    if (tosses[i] === tosses[i + 1]) common.push(tosses[i] as number)
  }
  return common
}
