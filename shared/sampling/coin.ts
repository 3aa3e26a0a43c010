/**
 * A coin that falls heads with chance exactly a/b, out of fair flips (PROTOCOL section 6): the flips are read as the
 * binary digits of a number between 0 and 1 and compared with those of a/b. Two flips on average at most.
 */

/** A fair flip. */
export type Flip = 0 | 1

/** Where fair flips come from. `next` gives -1 once a stream of tosses has run dry; derived streams never do. */
export interface FlipStream {
  next(): Flip | -1
}

/** How a coin fell, and the flips it took, as `0` and `1`. */
export interface CoinFall {
  readonly heads: boolean
  readonly flips: string
}

/** Below this, doubling a remainder stays exact in plain numbers. */
const PLAIN_LIMIT = 2 ** 52

/**
 * Tosses a coin with chance exactly a/b. Requires integers 0 ≤ a ≤ b, 0 < b ≤ 2^53 − 1; throws a RangeError otherwise.
 * Takes no flip where a = 0 or a = b. Returns null where the stream runs dry: flips read until then are lost to the
 * stream, so the caller goes back to where the pick began.
 */
export function tossCoin(a: number, b: number, stream: FlipStream): CoinFall | null {
  assertChance(a, b)
  if (a === 0) return { heads: false, flips: '' }
  if (a === b) return { heads: true, flips: '' }
  return b < PLAIN_LIMIT ? tossPlain(a, b, stream) : tossBig(BigInt(a), BigInt(b), stream)
}

function tossPlain(a: number, b: number, stream: FlipStream): CoinFall | null {
  let flips = ''
  for (let r = a; ; ) {
    r *= 2
    const digit = r >= b ? 1 : 0
    if (digit === 1) r -= b
    const flip = stream.next()
    if (flip === -1) return null
    flips += flip
    if (flip !== digit) return { heads: flip < digit, flips }
    if (r === 0) return { heads: false, flips }
  }
}

function tossBig(a: bigint, b: bigint, stream: FlipStream): CoinFall | null {
  let flips = ''
  for (let r = a; ; ) {
    r *= 2n
    const digit = r >= b ? 1 : 0
    if (digit === 1) r -= b
    const flip = stream.next()
    if (flip === -1) return null
    flips += flip
    if (flip !== digit) return { heads: flip < digit, flips }
    if (r === 0n) return { heads: false, flips }
  }
}

/** One rung of the comparison, for people to follow. */
export interface CoinRung {
  /** The next binary digit of a/b. */
  readonly digit: Flip
  /** What is left of a/b after the digit, as a numerator over b: 0 to b − 1. */
  readonly remainder: number
  readonly flip: Flip
  /** `equal` goes on to the next rung; the others settle the coin. */
  readonly outcome: 'heads' | 'tails' | 'equal'
}

/**
 * The comparison behind a coin that fell with these flips, rung by rung. Same ranges as `tossCoin`; throws a
 * RangeError where the flips do not settle this coin exactly at their last one.
 */
export function explainCoin(a: number, b: number, flips: string): readonly CoinRung[] {
  assertChance(a, b)
  if (!/^[01]*$/.test(flips)) throw new RangeError('flips are written as 0 and 1')
  const rungs: CoinRung[] = []
  let settled = a === 0 || a === b
  let r = BigInt(a)
  for (const character of flips) {
    if (settled) throw new RangeError('the coin had settled before its last flip')
    r *= 2n
    const digit = r >= BigInt(b) ? 1 : 0
    if (digit === 1) r -= BigInt(b)
    const flip = character === '1' ? 1 : 0
    const outcome = flip < digit ? 'heads' : flip > digit || r === 0n ? 'tails' : 'equal'
    settled = outcome !== 'equal'
    rungs.push({ digit, remainder: Number(r), flip, outcome })
  }
  if (!settled) throw new RangeError('these flips do not settle the coin')
  return rungs
}

function assertChance(a: number, b: number): void {
  if (!Number.isSafeInteger(a) || !Number.isSafeInteger(b) || a < 0 || b < 1 || a > b) {
    throw new RangeError(`no chance is ${a}/${b}`)
  }
}
